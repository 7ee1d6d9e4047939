// What is made of a survey's results while they pass by, one job after the other.
#pragma once

#include <filesystem>
#include <memory>
#include <string>
#include <vector>

#include <trotline/report/page.hpp>
#include <trotline/survey/gather.hpp>

#include "result_rows.hpp"

namespace trotline {

class GatherPart {
 public:
  GatherPart() = default;
  GatherPart(const GatherPart&) = delete;
  GatherPart& operator=(const GatherPart&) = delete;
  virtual ~GatherPart() = default;

  virtual void add(const GatheredJob& gathered) = 0;
  virtual void finish() = 0;
};

/// results.* in the formats asked for.
[[nodiscard]] std::unique_ptr<GatherPart> table_part(Ledger& ledger, const std::filesystem::path& folder,
                                                     const GatherOptions& options);

/// A folder for each source and species below `folder`/sources.
[[nodiscard]] std::unique_ptr<GatherPart> folder_part(const std::filesystem::path& folder,
                                                      const std::vector<std::string>& contents);

/// The data of the figures over all sources, and the figures themselves once finished.
class FigurePart : public GatherPart {
 public:
  FigurePart(Ledger& ledger, const std::filesystem::path& folder);
  ~FigurePart() override;

  void add(const GatheredJob& gathered) override;
  void finish() override;

  /// For the page. @pre finished
  [[nodiscard]] std::vector<PageFigure> figures() const;

  /// What could not be drawn, and why.
  [[nodiscard]] const std::vector<std::string>& warnings() const;

 private:
  class Data;
  std::unique_ptr<Data> data_;
};

/// report.html; the figures are asked for when it is finished.
[[nodiscard]] std::unique_ptr<GatherPart> page_part(Ledger& ledger, const std::filesystem::path& folder,
                                                    const std::string& title, const FigurePart* figures);

}  // namespace trotline
