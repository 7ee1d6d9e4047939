#include <algorithm>
#include <cmath>

#include <trotline/report/display_text.hpp>
#include <trotline/report/text_table.hpp>

namespace trotline {
namespace {

constexpr std::size_t kGap = 2;
constexpr std::size_t kLeastFirstColumn = 6;
constexpr int kBarHalf = 5;  // characters on each side of zero

std::size_t width_of(const TextColumn& column) {
  std::size_t width = display_width(column.header);
  for (const std::string& cell : column.cells) width = std::max(width, display_width(cell));
  return width;
}

void shrink_first(std::vector<TextColumn>& columns, std::size_t width, bool ascii) {
  std::size_t total = (columns.size() - 1) * kGap;
  for (const TextColumn& column : columns) total += width_of(column);
  if (total <= width) return;
  const std::size_t first = width_of(columns.front());
  const std::size_t excess = total - width;
  const std::size_t room = std::max(kLeastFirstColumn, first > excess ? first - excess : 0);
  columns.front().header = shortened(columns.front().header, room, ascii);
  for (std::string& cell : columns.front().cells) cell = shortened(cell, room, ascii);
}

std::string without_trailing_spaces(std::string line) {
  line.erase(line.find_last_not_of(' ') + 1);
  return line;
}

/// The bar on one side, from zero outwards.
std::vector<std::string> bar_outwards(double size, bool to_right, Glyphs glyphs) {
  const bool ascii = glyphs == Glyphs::ascii;
  const auto halves = static_cast<int>(std::lround(2.0 * std::min(size, kBarHalf + 1.0)));
  std::vector<std::string> bar;
  for (int i = 0; i < std::min(halves / 2, kBarHalf); ++i) bar.emplace_back(ascii ? "#" : "█");
  if (halves > 2 * kBarHalf) {
    bar.back() = ascii ? (to_right ? ">" : "<") : (to_right ? "▶" : "◀");
  } else if (halves % 2 == 1) {
    bar.emplace_back(ascii ? ":" : (to_right ? "▌" : "▐"));
  }
  bar.resize(kBarHalf, " ");
  return bar;
}

}  // namespace

std::vector<std::string> text_table(std::vector<TextColumn> columns, std::size_t width, Glyphs glyphs) {
  if (columns.empty()) return {};
  const bool ascii = glyphs == Glyphs::ascii;
  shrink_first(columns, width, ascii);
  std::vector<std::string> lines(columns.front().cells.size() + 1);
  for (std::size_t c = 0; c < columns.size(); ++c) {
    const TextColumn& column = columns[c];
    const std::size_t wide = width_of(column);
    for (std::size_t i = 0; i < lines.size(); ++i) {
      const std::string& cell = i == 0 ? column.header : column.cells.at(i - 1);
      if (c > 0) lines[i] += std::string(kGap, ' ');
      lines[i] += column.right ? padded_left(cell, wide) : padded_right(cell, wide);
    }
  }
  for (std::string& line : lines) line = shortened(without_trailing_spaces(line), width, ascii);
  return lines;
}

std::string residual_bar(double residual_sigma, Glyphs glyphs) {
  if (std::isnan(residual_sigma)) return {};
  const double size = std::abs(residual_sigma);
  auto left = bar_outwards(residual_sigma < 0.0 ? size : 0.0, false, glyphs);
  std::reverse(left.begin(), left.end());
  std::string bar;
  for (const std::string& piece : left) bar += piece;
  bar += glyphs == Glyphs::ascii ? "|" : "│";
  for (const std::string& piece : bar_outwards(residual_sigma > 0.0 ? size : 0.0, true, glyphs)) bar += piece;
  return bar;
}

}  // namespace trotline
