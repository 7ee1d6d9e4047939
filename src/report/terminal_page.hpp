// The lines of a report on a terminal, whatever they say.
#pragma once

#include <algorithm>
#include <string>

#include <trotline/report/display_text.hpp>
#include <trotline/report/rounding.hpp>
#include <trotline/report/terminal.hpp>

namespace trotline::terminal {

inline constexpr std::size_t kLabelWidth = 10;  // "  assumes " and its like
inline constexpr std::size_t kLeastWidth = 40;

inline constexpr const char* kBold = "\x1b[1m";
inline constexpr const char* kDim = "\x1b[2m";
inline constexpr const char* kRed = "\x1b[31m";
inline constexpr const char* kYellow = "\x1b[33m";

/// Collects the lines of the report; the only place that knows width and colour.
class Page {
 public:
  explicit Page(const TerminalOptions& options)
      : options_(options), width_(std::max(options.width, kLeastWidth)) {}

  [[nodiscard]] std::size_t width() const { return width_; }
  [[nodiscard]] Glyphs glyphs() const { return options_.unicode ? Glyphs::unicode : Glyphs::ascii; }
  [[nodiscard]] const char* pick(const char* unicode, const char* ascii) const {
    return options_.unicode ? unicode : ascii;
  }

  void line(const std::string& text, const char* style = "") {
    text_ += styled(shortened(text, width_, !options_.unicode), style) + "\n";
  }
  void blank() { text_ += "\n"; }

  void heading(const std::string& text) {
    blank();
    line(text, kBold);
  }

  /// "  label   text", the text wrapped with a hanging indent.
  void entry(const std::string& label, const std::string& text, const char* style = "") {
    std::string start = padded_right("  " + label, kLabelWidth);
    for (const std::string& piece : wrapped(text, width_ - kLabelWidth)) {
      text_ += styled(start, kDim) + styled(piece, style) + "\n";
      start.assign(kLabelWidth, ' ');
    }
  }

  /// "  - text" with a mark in front.
  void item(const std::string& mark, const std::string& text, const char* style = "") {
    const std::size_t indent = 3 + display_width(mark);
    std::string start = "  " + mark + " ";
    for (const std::string& piece : wrapped(text, width_ - indent)) {
      text_ += styled(start + piece, style) + "\n";
      start.assign(indent, ' ');
    }
  }

  [[nodiscard]] std::string text() const { return text_; }

 private:
  [[nodiscard]] std::string styled(const std::string& text, const char* style) const {
    return options_.colour && *style != '\0' ? style + text + "\x1b[0m" : text;
  }

  TerminalOptions options_;
  std::size_t width_;
  std::string text_;
};

}  // namespace trotline::terminal
