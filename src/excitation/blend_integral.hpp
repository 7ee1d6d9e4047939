// The velocity integral over lines that overlap.
#pragma once

#include <trotline/excitation/forward_model.hpp>

namespace trotline::internal {

/// W = integral of (1 - exp(-tau))/tau * sum of tau_m source_m dv, and its derivatives, into the members.
///
/// The integrand is analytic, so the trapezoidal sum converges faster than any power of its step; the step is
/// halved until sums over even and odd points agree to the root of kBlendError. Members that do not overlap
/// are summed apart.
/// @param members  by rising offset
/// @return W [K km/s]
double integrate_blend(BlendMember* members, Eigen::Index count);

}  // namespace trotline::internal
