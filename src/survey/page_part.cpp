#include <fmt/format.h>

#include <fstream>

#include <trotline/base/errors.hpp>

#include "gather_parts.hpp"

namespace trotline {
namespace {

namespace fs = std::filesystem;

/// A stream that complains when something is lost.
class PartFile {
 public:
  explicit PartFile(fs::path path) : path_(std::move(path)), stream_(path_, std::ios::binary) {}

  void write(const std::string& text) { stream_ << text; }

  void append(const fs::path& other) {
    std::ifstream source(other, std::ios::binary);
    if (source.peek() != std::ifstream::traits_type::eof()) stream_ << source.rdbuf();
  }

  void close() {
    stream_.close();
    if (!stream_) throw SystemError(fmt::format("{} cannot be written", path_.string()));
  }

  [[nodiscard]] const fs::path& path() const { return path_; }

 private:
  fs::path path_;
  std::ofstream stream_;
};

/// Rows and sections are kept in two files until all jobs have passed, and then put into the page.
class PagePart : public GatherPart {
 public:
  PagePart(Ledger& ledger, const fs::path& folder, const std::string& title, const FigurePart* figures)
      : folder_(folder),
        page_(frame_of(ledger, title)),
        figures_(figures),
        rows_(folder / ".page-rows"),
        sections_(folder / ".page-sections") {}

  void add(const GatheredJob& gathered) override {
    const StoredJob& job = gathered.job;
    const SurveyPage::Pieces pieces =
        page_.add({static_cast<std::size_t>(job.position), job.source, job.species, name_of(job.status),
                   job.message, gathered.result ? &*gathered.result : nullptr, job.table_file});
    rows_.write(pieces.row);
    sections_.write(pieces.section);
  }

  void finish() override {
    rows_.close();
    sections_.close();
    if (figures_ != nullptr) page_.set_figures(figures_->figures());
    PartFile page(folder_ / "report.html");
    page.write(page_.opening());
    page.append(rows_.path());
    page.write(page_.middle());
    page.append(sections_.path());
    page.write(page_.closing());
    page.close();
    fs::remove(rows_.path());
    fs::remove(sections_.path());
  }

 private:
  static PageFrame frame_of(Ledger& ledger, const std::string& title) {
    PageFrame frame;
    frame.title = title;
    for (const UnreadTable& table : ledger.unread_tables())
      frame.unread.emplace_back(table.file, table.message);
    return frame;
  }

  fs::path folder_;
  SurveyPage page_;
  const FigurePart* figures_;
  PartFile rows_;
  PartFile sections_;
};

}  // namespace

std::unique_ptr<GatherPart> page_part(Ledger& ledger, const fs::path& folder, const std::string& title,
                                      const FigurePart* figures) {
  return std::make_unique<PagePart>(ledger, folder, title, figures);
}

}  // namespace trotline
