#include "latex_results.hpp"

#include <fmt/format.h>

#include <cmath>
#include <fstream>

#include <trotline/base/errors.hpp>
#include <trotline/base/text.hpp>
#include <trotline/base/version.hpp>
#include <trotline/report/rounding.hpp>
#include <trotline/report/text_tables.hpp>

namespace trotline {
namespace {

constexpr const char* kHead =
    "\\hline\\hline\n"
    "Source & Species & $T_{\\rm rot}$ & $N$ & $\\log_{10} N$ & Lines & $\\chi^2$/d.o.f. & Note \\\\\n"
    " & & (K) & (cm$^{-2}$) & ($N$ in cm$^{-2}$) & & & \\\\\n"
    "\\hline\n";
constexpr const char* kColumns = "llcccccl";

std::string with_error(const Estimate& estimate) {
  if (!std::isfinite(estimate.value)) return "\\ldots";
  const std::string text = value_with_error(estimate.value, estimate.error, Glyphs::ascii);
  if (text.find("not known") == std::string::npos) return latex_number(text);
  return latex_number(significant(estimate.value, 4, Glyphs::ascii));
}

std::string chi_squared(const Result& result) {
  if (!std::isfinite(result.chi2)) return "\\ldots";
  return fmt::format("${}/{}$", fixed_decimals(result.chi2, 1, Glyphs::ascii), result.dof);
}

/// A word where the row is no plain answer.
std::string note_of(const GatheredJob& gathered) {
  if (!gathered.result) return "failed";
  if (gathered.result->status != Status::done) return name_of(gathered.result->status);
  return gathered.result->temperature_fixed ? "$T$ fixed" : "";
}

std::int64_t fitted_lines(const Result& result) {
  std::int64_t count = 0;
  for (const LineResult& line : result.lines) count += line.used && !line.limit;
  return count;
}

}  // namespace

class LatexResults::File {
 public:
  explicit File(const std::filesystem::path& path) : path_(path.string()), stream_(path, std::ios::binary) {}

  void write(const std::string& text) { stream_ << text; }

  void close() {
    stream_.close();
    if (!stream_) throw SystemError(fmt::format("the table {} cannot be written", path_));
  }

 private:
  std::string path_;
  std::ofstream stream_;
};

LatexResults::LatexResults(const std::filesystem::path& path, const std::string& title, std::int64_t rows)
    : file_(std::make_unique<File>(path)), long_(rows > kShortTable) {
  file_->write(fmt::format("% {}; trotline {}\n", printable(title), version()));
  file_->write("% Errors are standard errors. To be read with \\input");
  file_->write(long_ ? "; needs \\usepackage{longtable} and one column of text.\n" : ".\n");
  const std::string environment = long_ ? "longtable" : "tabular";
  file_->write(fmt::format("\\begin{{{}}}{{{}}}\n{}", environment, kColumns, kHead));
  if (long_) file_->write("\\endhead\n\\hline\n\\endfoot\n");
}

LatexResults::~LatexResults() = default;

void LatexResults::add(const GatheredJob& gathered) {
  const Result blank;
  const Result& result = gathered.result ? *gathered.result : blank;
  // The empty group keeps a name in brackets, or a star, from being an argument of the \\ before it.
  file_->write(fmt::format("{{}}{} & {} & {} & {} & {} & {} & {} & {} \\\\\n", latex_text(gathered.job.source),
                           latex_text(gathered.job.species), with_error(result.temperature_k),
                           with_error(result.column_density_cm2), with_error(result.log10_column_density_cm2),
                           gathered.result ? fmt::format("{}", fitted_lines(result)) : "\\ldots",
                           chi_squared(result), note_of(gathered)));
}

void LatexResults::finish() {
  file_->write(long_ ? "\\end{longtable}\n" : "\\hline\n\\end{tabular}\n");
  file_->close();
}

}  // namespace trotline
