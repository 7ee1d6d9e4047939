#include <trotline/base/errors.hpp>

#include <fmt/format.h>

namespace trotline {
namespace {

std::string compose(const Place& place, const Complaint& complaint) {
  std::string text = to_string(place);
  if (!text.empty()) text += ": ";
  text += complaint.found;
  if (!complaint.expected.empty()) text += "; expected " + complaint.expected;
  if (!complaint.advice.empty()) text += "; " + complaint.advice;
  return text;
}

}  // namespace

std::string to_string(const Place& place) {
  std::string text = place.file;
  if (place.line > 0) text += fmt::format("{}{}", text.empty() ? "line " : ":", place.line);
  if (place.line > 0 && place.column > 0) text += fmt::format(":{}", place.column);
  return text;
}

InputError::InputError(Place place, const Complaint& complaint)
    : Error(compose(place, complaint)), place_(std::move(place)), complaint_(complaint) {}

DomainError::DomainError(const std::string& argument, double value, const std::string& allowed)
    : Error(fmt::format("{} = {:g}: outside its domain, {}", argument, value, allowed)) {}

}  // namespace trotline
