#include "fits_structure.hpp"

#include <array>
#include <optional>

#include <trotline/base/errors.hpp>
#include <trotline/base/text.hpp>

namespace trotline {
namespace {

std::size_t up_to_block(std::size_t bytes) { return (bytes + kFitsBlock - 1) / kFitsBlock * kFitsBlock; }

/// What a card holds between `=` and the comment, without the quotation marks of a string.
std::string_view value_of(std::string_view card) {
  std::string_view value = trimmed(card.substr(10));
  if (value.starts_with('\'')) return trimmed(value.substr(1, value.find('\'', 1) - 1));
  return trimmed(value.substr(0, value.find('/')));
}

/// Walks over the cards of one unit's header in the order that the standard demands.
class Walker {
 public:
  Walker(std::string_view bytes, std::size_t start, std::size_t number, const std::string& file)
      : bytes_(bytes), start_(start), number_(number), file_(file) {
    find_end();
  }

  FitsUnit unit() {
    unit_.header = header_;
    unit_.data_start = std::min(start_ + up_to_block(header_.size()), bytes_.size());
    unit_.data_bytes = data_bytes();
    const std::size_t available = bytes_.size() - unit_.data_start;
    if (unit_.data_bytes > available) {
      refuse(
          fmt::format("its data should take {} bytes but the file has only {}", unit_.data_bytes, available));
    }
    return unit_;
  }

 private:
  [[noreturn]] void refuse(const std::string& what) const {
    throw InputError(Place{file_}, {fmt::format("{}: {}", where(), what),
                                    "a complete file that follows the FITS standard"});
  }

  [[nodiscard]] std::string where() const {
    return number_ == 0 ? "the primary header" : fmt::format("extension {}", number_);
  }

  void find_end() {
    for (std::size_t at = start_; at + kFitsCard <= bytes_.size(); at += kFitsCard) {
      const std::string_view card = bytes_.substr(at, kFitsCard);
      for (const char c : card) {
        if (static_cast<unsigned char>(c) < 0x20) {
          refuse(fmt::format("keyword '{}' stands in a card with a control character",
                             printable(trimmed(card.substr(0, 8)))));
        }
      }
      if (trimmed(card.substr(0, 8)) == "END") {
        header_ = bytes_.substr(start_, at + kFitsCard - start_);
        return;
      }
    }
    refuse("the keyword END is missing");
  }

  [[nodiscard]] std::string_view card(std::size_t index) const {
    return index * kFitsCard < header_.size() ? header_.substr(index * kFitsCard, kFitsCard)
                                              : std::string_view{};
  }

  /// The value of the next mandatory card, which must be `keyword`.
  std::string_view next(const std::string& keyword) {
    const std::string_view found = card(index_++);
    if (found.empty() || trimmed(found.substr(0, 8)) != keyword || found.substr(8, 2) != "= ") {
      refuse(fmt::format("keyword {} is missing where '{}' stands", keyword,
                         printable(trimmed(found.substr(0, std::min<std::size_t>(30, found.size()))))));
    }
    return value_of(found);
  }

  std::size_t next_whole(const std::string& keyword, long long least, long long most) {
    const std::string_view text = next(keyword);
    const auto value = parse_whole_number(text);
    if (!value || *value < least || *value > most)
      refuse(fmt::format("keyword {} is '{}'", keyword, printable(text)));
    return static_cast<std::size_t>(*value);
  }

  [[nodiscard]] std::optional<std::string_view> find(const std::string& keyword) const {
    for (std::size_t i = 0; i * kFitsCard < header_.size(); ++i) {
      const std::string_view found = card(i);
      if (found.substr(8, 1) == "=" && trimmed(found.substr(0, 8)) == keyword) return value_of(found);
    }
    return std::nullopt;
  }

  /// a * b where that cannot overflow; otherwise the file is absurd.
  [[nodiscard]] std::size_t times(std::size_t a, std::size_t b, const std::string& keyword) const {
    constexpr std::size_t kMost = std::size_t{1} << 48;
    if (b != 0 && a > kMost / b)
      refuse(fmt::format("keyword {} makes the data larger than any file", keyword));
    return a * b;
  }

  std::size_t data_bytes() {
    read_kind();
    const std::size_t bits = bits_a_value();
    const std::size_t axes = next_whole("NAXIS", 0, 999);
    std::size_t values = axes == 0 ? 0 : 1;
    for (std::size_t i = 1; i <= axes; ++i) {
      const std::string keyword = fmt::format("NAXIS{}", i);
      lengths_.push_back(next_whole(keyword, 0, (1LL << 48)));
      values = times(values, lengths_.back(), keyword);
    }
    if (number_ == 0 && !lengths_.empty() && lengths_[0] == 0 && find("GROUPS").value_or("F") == "T") {
      refuse("keyword GROUPS announces random groups, which hold no spectrum");
    }
    if (number_ > 0) values = with_heap(values);
    if (is_table_) require_table(axes, bits);
    return times(values, bits / 8, lengths_.empty() ? "BITPIX" : fmt::format("NAXIS{}", lengths_.size()));
  }

  void read_kind() {
    if (number_ == 0) {
      if (const std::string_view value = next("SIMPLE"); value != "T")
        refuse(fmt::format("keyword SIMPLE is '{}'", printable(value)));
      return;
    }
    const std::string_view kind = next("XTENSION");
    is_binary_ = kind == "BINTABLE" || kind == "A3DTABLE";
    is_table_ = is_binary_ || kind == "TABLE";
  }

  std::size_t bits_a_value() {
    const std::string_view text = next("BITPIX");
    const long long value = parse_whole_number(text).value_or(0);
    static constexpr std::array<long long, 6> kAllowed = {8, 16, 32, 64, -32, -64};
    if (std::find(kAllowed.begin(), kAllowed.end(), value) == kAllowed.end()) {
      refuse(fmt::format("keyword BITPIX is '{}'", printable(text)));
    }
    return static_cast<std::size_t>(std::abs(value));
  }

  std::size_t with_heap(std::size_t values) {
    const std::size_t heap = next_whole("PCOUNT", 0, 1LL << 47);
    const std::size_t groups = next_whole("GCOUNT", 1, 1LL << 30);
    return times(values + heap, groups, "GCOUNT");
  }

  void require_table(std::size_t axes, std::size_t bits) {
    if (axes != 2) refuse(fmt::format("keyword NAXIS is {} in a table, which has two", axes));
    if (bits != 8) refuse(fmt::format("keyword BITPIX is {} in a table, which has 8", bits));
    const std::size_t fields = next_whole("TFIELDS", 0, 999);
    std::size_t width = 0;
    for (std::size_t i = 1; i <= fields; ++i) {
      const std::string keyword = fmt::format("TFORM{}", i);
      const auto form = find(keyword);
      if (!form) refuse(fmt::format("keyword {} is missing", keyword));
      if (is_binary_) width += field_bytes(*form, keyword);
    }
    if (is_binary_ && width != lengths_[0]) {
      refuse(fmt::format("keyword NAXIS1 says {} bytes a row but the columns take {}", lengths_[0], width));
    }
  }

  /// Bytes of one row that a column with this TFORM takes: a repeat count, a letter, remarks.
  [[nodiscard]] std::size_t field_bytes(std::string_view form, const std::string& keyword) const {
    const std::size_t digits = std::min(form.find_first_not_of("0123456789"), form.size());
    const auto count = digits == 0 ? std::optional(1LL) : parse_whole_number(form.substr(0, digits));
    static constexpr std::string_view kLetters = "LXBIJKAEDCMPQ";
    static constexpr std::array<std::size_t, 14> kBits = {8,  1,  8,  16,  32, 64,  8,
                                                          32, 64, 64, 128, 64, 128, 8};
    const std::size_t letter = digits < form.size() ? kLetters.find(form[digits]) : std::string_view::npos;
    if (!count || letter == std::string_view::npos)
      refuse(fmt::format("keyword {} is '{}'", keyword, printable(form)));
    return (times(static_cast<std::size_t>(*count), kBits.at(letter), keyword) + 7) / 8;
  }

  std::string_view bytes_;
  std::size_t start_;
  std::size_t number_;
  const std::string& file_;
  std::string_view header_;
  std::size_t index_ = 0;
  std::vector<std::size_t> lengths_;
  bool is_table_ = false;
  bool is_binary_ = false;
  FitsUnit unit_;
};

}  // namespace

std::vector<FitsUnit> fits_structure(std::string_view bytes, const std::string& name) {
  if (!bytes.starts_with("SIMPLE  =")) {
    throw InputError(Place{name}, {"the file does not begin with the keyword SIMPLE", "a FITS file"});
  }
  std::vector<FitsUnit> units;
  std::size_t at = 0;
  while (at == 0 || bytes.substr(std::min(at, bytes.size())).starts_with("XTENSION")) {
    units.push_back(Walker(bytes, at, units.size(), name).unit());
    at = units.back().data_start + up_to_block(units.back().data_bytes);
  }
  return units;
}

}  // namespace trotline
