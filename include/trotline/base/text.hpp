#pragma once

#include <optional>
#include <string>
#include <string_view>
#include <vector>

namespace trotline {

/// `text` without white space at its ends.
[[nodiscard]] std::string_view trimmed(std::string_view text);

/// ASCII lower case; other bytes stay as they are.
[[nodiscard]] std::string lower_case(std::string_view text);

/// The number that fills the whole of `text` (white space at its ends aside), in C notation whatever
/// the locale: "1.5", "-2e3", "+4", "nan" and "inf". Nothing when anything else stands there, or when
/// the number does not fit a double.
[[nodiscard]] std::optional<double> parse_number(std::string_view text);

/// The same for a whole number.
[[nodiscard]] std::optional<long long> parse_whole_number(std::string_view text);

/// The candidate that takes the fewest edits (insert, delete, replace, swap neighbours; case free) to
/// become `word`; nothing when none is nearer than a third of the word's length plus one.
[[nodiscard]] std::optional<std::string> nearest_name(std::string_view word,
                                                      const std::vector<std::string>& candidates);

/// "did you mean 'x'?" for the nearest candidate, or an empty text.
[[nodiscard]] std::string did_you_mean(std::string_view word, const std::vector<std::string>& candidates);

/// "a, b, c"; at most `most` names, then how many more there are.
[[nodiscard]] std::string listed(const std::vector<std::string>& names, std::size_t most = 12);

/// True when every byte sequence of `text` is valid UTF-8 (no overlong forms, no surrogates).
[[nodiscard]] bool is_utf8(std::string_view text);

/// `text` made safe to print on one line: control characters become spaces and bytes that are not UTF-8
/// become U+FFFD.
[[nodiscard]] std::string printable(std::string_view text);

/// 64-bit FNV-1a fingerprint as 16 hexadecimal digits. It tells whether bytes have changed; it is no
/// protection against intent. Reference: Fowler, Noll & Vo, IETF draft-eastlake-fnv.
[[nodiscard]] std::string fingerprint(std::string_view bytes);

}  // namespace trotline
