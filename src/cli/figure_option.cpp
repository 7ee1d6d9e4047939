#include "figure_option.hpp"

#include <fmt/format.h>

#include <algorithm>
#include <map>

#include <trotline/base/text.hpp>

#include "command_line.hpp"

namespace trotline {

std::vector<FigureFormat> figure_formats(const std::string& text) {
  if (text == "none") return {};
  std::vector<FigureFormat> formats;
  for (std::size_t start = 0; start <= text.size();) {
    const std::size_t comma = std::min(text.find(',', start), text.size());
    const std::string word = lower_case(trimmed(std::string_view(text).substr(start, comma - start)));
    const std::map<std::string, FigureFormat> known = {
        {"svg", FigureFormat::svg}, {"pdf", FigureFormat::pdf}, {"png", FigureFormat::png}};
    if (!known.contains(word)) {
      throw UsageError(fmt::format("--figures: there is no figure format '{}'; expected a list of svg, pdf, png, or none",
                                   printable(word)));
    }
    formats.push_back(known.at(word));
    start = comma + 1;
  }
  return formats;
}

}  // namespace trotline
