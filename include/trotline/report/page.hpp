#pragma once

#include <cstddef>
#include <memory>
#include <string>
#include <utility>
#include <vector>

#include <trotline/analysis/result.hpp>

namespace trotline {

/// A verdict without what stands in brackets at its end, for counting: "one temperature does not describe the
/// lines" of "... (failed: curvature)".
[[nodiscard]] std::string verdict_without_details(const std::string& verdict);

/// One job of a survey as the page shows it.
struct PageJob {
  std::size_t id = 0;  ///< names the section, "#s12"
  std::string source;
  std::string species;
  std::string status;  ///< "done", "weak" or "failed"
  std::string message;
  const Result* result = nullptr;  ///< null where the job failed
  std::string table_file;
};

struct PageFigure {
  std::string caption;
  std::string svg;  ///< a whole SVG document
};

/// What stands around the jobs.
struct PageFrame {
  std::string title;
  std::vector<PageFigure> figures;
  std::vector<std::pair<std::string, std::string>> unread;  ///< tables that could not be read, and why
};

/// A survey as one HTML file that needs nothing else: overview, table to sort and filter, one section a job.
///
/// The page is made in pieces that are short-lived, so that a large survey costs little memory: hand every
/// job to add(), write `row` and `section` of it to two places, and put them together as
/// opening() + rows + middle() + sections + closing(). All texts are escaped; the page's own policy lets the
/// browser load nothing from anywhere. Above kMostRows and kMostSections jobs the later ones are left out of
/// the table and of the sections, and the page says so.
class SurveyPage {
 public:
  static constexpr std::size_t kMostRows = 5000;
  static constexpr std::size_t kMostSections = 2500;

  explicit SurveyPage(PageFrame frame);
  ~SurveyPage();
  SurveyPage(const SurveyPage&) = delete;
  SurveyPage& operator=(const SurveyPage&) = delete;

  struct Pieces {
    std::string row;      ///< empty where it is left out
    std::string section;  ///< likewise
  };
  [[nodiscard]] Pieces add(const PageJob& job);

  [[nodiscard]] std::string opening() const;
  [[nodiscard]] std::string middle() const;
  [[nodiscard]] std::string closing() const;

  /// The figures may be made after the jobs have been added.
  void set_figures(std::vector<PageFigure> figures);

 private:
  struct Templates;
  struct Tally;

  PageFrame frame_;
  std::unique_ptr<Templates> templates_;
  std::unique_ptr<Tally> tally_;
};

}  // namespace trotline
