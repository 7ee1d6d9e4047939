#pragma once

#include <string>
#include <string_view>

namespace trotline {

/// A chemical formula in ASCII with Unicode subscripts and superscripts:
///
///     CH3CN -> CH₃CN    13CO -> ¹³CO    C18O -> C¹⁸O    HCO+ -> HCO⁺    c-C3H2 -> c-C₃H₂    C6H- -> C₆H⁻
///
/// Digits behind an element or a closing parenthesis are a count, unless they and the element behind them
/// name a stable isotope of C, N, O, Si, S or Cl; other digits are a mass number. A + or - at the end is the
/// charge. Only the first word is set so; what follows a space or comma ("CH3CN, v8=1") stays as it is, and
/// so does a text that holds other than ASCII or no capital letter.
[[nodiscard]] std::string typeset_formula(std::string_view formula);

/// A transition's label with true dashes: a hyphen behind a digit, letter or closing parenthesis becomes an
/// en dash ("12(3)-11(3)" -> "12(3)–11(3)"), one before a digit elsewhere a minus sign. The rest stays.
[[nodiscard]] std::string typeset_transition(std::string_view label);

}  // namespace trotline
