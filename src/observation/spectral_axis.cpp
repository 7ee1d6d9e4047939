#include <trotline/base/errors.hpp>
#include <trotline/observation/spectral_axis.hpp>

namespace trotline {

SpectralAxis::SpectralAxis(double first_hz, double step_hz, std::size_t channels)
    : size_(channels), first_hz_(first_hz), step_hz_(step_hz) {
  if (!(std::isfinite(step_hz) && step_hz != 0.0)) throw DomainError("step_hz", step_hz, "finite and not 0");
  const double last_hz = first_hz + step_hz * (static_cast<double>(channels) - 1.0);
  for (const double end_hz : {first_hz, last_hz}) {
    if (!(std::isfinite(end_hz) && end_hz > 0.0))
      throw DomainError("frequency_hz", end_hz, "finite and above 0");
  }
}

SpectralAxis::SpectralAxis(Eigen::ArrayXd frequency_hz)
    : size_(static_cast<std::size_t>(frequency_hz.size())) {
  if (size_ < 2) throw DomainError("channels", static_cast<double>(size_), "two or more");
  const bool up = frequency_hz(1) > frequency_hz(0);
  for (Eigen::Index i = 0; i < frequency_hz.size(); ++i) {
    const double here = frequency_hz(i);
    const bool steady = i == 0 || (up ? here > frequency_hz(i - 1) : here < frequency_hz(i - 1));
    if (!(std::isfinite(here) && here > 0.0 && steady)) {
      throw DomainError("frequency_hz", here, "above 0, and channels that rise or fall steadily");
    }
  }
  table_ = std::make_shared<const Eigen::ArrayXd>(std::move(frequency_hz));
}

double SpectralAxis::frequency_hz(double channel) const {
  if (!table_) return first_hz_ + step_hz_ * channel;
  const auto last = static_cast<double>(size_ - 2);
  const auto below = static_cast<Eigen::Index>(std::clamp(std::floor(channel), 0.0, last));
  const double here = (*table_)(below);
  return here + ((*table_)(below + 1) - here) * (channel - static_cast<double>(below));
}

double SpectralAxis::channel_of(double frequency_hz) const {
  if (!table_) return (frequency_hz - first_hz_) / step_hz_;
  const double* begin = table_->data();
  const double* end = begin + size_;
  const double* above = rises() ? std::lower_bound(begin, end, frequency_hz)
                                : std::lower_bound(begin, end, frequency_hz, std::greater<>());
  const auto below = std::clamp<std::ptrdiff_t>(above - begin - 1, 0, static_cast<std::ptrdiff_t>(size_) - 2);
  return static_cast<double>(below) + (frequency_hz - begin[below]) / (begin[below + 1] - begin[below]);
}

double SpectralAxis::width_hz(std::size_t channel) const {
  if (!table_) return std::abs(step_hz_);
  const auto centre = static_cast<double>(channel);
  return std::abs(frequency_hz(centre + 0.5) - frequency_hz(centre - 0.5));
}

double SpectralAxis::low_hz() const {
  const double first = frequency_hz(-0.5);
  return std::min(first, frequency_hz(static_cast<double>(size_) - 0.5));
}

double SpectralAxis::high_hz() const {
  const double first = frequency_hz(-0.5);
  return std::max(first, frequency_hz(static_cast<double>(size_) - 0.5));
}

SpectralAxis SpectralAxis::scaled(double factor) const {
  if (!(std::isfinite(factor) && factor > 0.0)) throw DomainError("factor", factor, "finite and above 0");
  if (factor == 1.0) return *this;
  if (!table_) return {first_hz_ * factor, step_hz_ * factor, size_};
  return SpectralAxis(Eigen::ArrayXd(*table_ * factor));
}

}  // namespace trotline
