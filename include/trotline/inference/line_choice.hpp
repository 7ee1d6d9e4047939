#pragma once

#include <cstddef>
#include <cstdint>
#include <vector>

namespace trotline {

/// How the intensity of one measurement follows the unknowns ln N and ln T, and how well it is known.
struct Sensitivity {
  double by_ln_column = 0.0;         ///< dW/d ln N [K km/s]
  double by_ln_temperature = 0.0;    ///< dW/d ln T at fixed N [K km/s]
  double by_shared_calibration = 0.0;  ///< W times the standard error of a calibration that all share [K km/s]
  double sigma_k_km_s = 0.0;         ///< standard error of W, its own calibration included; > 0
};

/// Standard errors that measurements will give, infinite where they set none.
struct ExpectedErrors {
  double ln_column = 0.0;       ///< of ln N, T free
  double ln_temperature = 0.0;  ///< of ln T, N free; times T it is the error of T
};

/// From the Fisher information of ln N and ln T, with a shared calibration factor as a third unknown whose
/// standard error is known beforehand. The information is that of Gaussian noise around the model: no unbiased
/// estimator does better, and a maximum of the likelihood comes close once T is known to some 10 %.
/// Reference: [Fisher1925]; the bound is that of Cramer and Rao.
/// @param which  indices into `all`
/// @throws DomainError  a sigma that is not above 0, a number that is not finite
[[nodiscard]] ExpectedErrors expected_errors(const std::vector<Sensitivity>& all,
                                             const std::vector<std::size_t>& which);

/// What is to be known best.
enum class Aim { temperature, column };

/// Which measurements to make.
struct LineChoice {
  std::vector<std::size_t> lines;  ///< rising indices
  ExpectedErrors errors;
  bool is_exhaustive = false;  ///< every set was tried; else no exchange of one line improves this one
};

/// The `count` measurements that minimise the expected error of the aim.
///
/// Every set is tried where there are at most kMostSetsTried of them. Beyond, sets are improved by exchanging
/// one line at a time until no exchange helps, from several starts: the optimum need not be among the ends.
/// Equal sets are decided by the order of `all`, so the choice does not depend on the machine.
/// Reference: [Fedorov1972] for the exchange.
/// @param count  from 2 (fewer lines set no temperature) to all.size()
/// @throws DomainError  naming count, or as expected_errors()
[[nodiscard]] LineChoice choose_lines(const std::vector<Sensitivity>& all, std::size_t count, Aim aim);

inline constexpr double kMostSetsTried = 5e6;

}  // namespace trotline
