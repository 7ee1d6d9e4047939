// Keywords of a FITS header by name.
#pragma once

#include <optional>
#include <string>
#include <string_view>

#include <trotline/base/errors.hpp>

namespace trotline {

/// Looks into the cards of one header, which must outlive it.
class HeaderCards {
 public:
  /// @param where  e.g. "spectra.fits": stands for the file in messages
  HeaderCards(std::string_view cards, std::string where) : cards_(cards), where_(std::move(where)) {}

  [[nodiscard]] std::string_view cards() const { return cards_; }
  [[nodiscard]] const std::string& where() const { return where_; }

  /// The value as text, without quotation marks and blanks at its end; nothing where the keyword is missing
  /// or its value undefined. The first card counts.
  [[nodiscard]] std::optional<std::string> text(std::string_view keyword) const;

  /// The card as it stands, of 80 characters; empty where the keyword is missing.
  [[nodiscard]] std::string_view card(std::string_view keyword) const;

  /// The value as a finite number, also where it is quoted. @throws InputError naming the keyword otherwise
  [[nodiscard]] std::optional<double> number(std::string_view keyword) const;

  /// The first of the keywords that is there, as number(). @param keywords  separated by blanks
  [[nodiscard]] std::optional<double> first_number(std::string_view keywords) const;

  /// Refuses the header for a keyword.
  [[noreturn]] void refuse(const std::string& found, const std::string& expected,
                           const std::string& advice = {}) const {
    throw InputError(Place{where_}, {found, expected, advice});
  }

 private:
  std::string_view cards_;
  std::string where_;
};

/// One card of 80 characters; the value is quoted where it is a text.
[[nodiscard]] std::string text_card(const std::string& keyword, std::string_view value);
[[nodiscard]] std::string number_card(const std::string& keyword, double value);

}  // namespace trotline
