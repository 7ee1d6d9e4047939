#include <algorithm>

#include <trotline/base/files.hpp>
#include <trotline/report/diagram.hpp>
#include <trotline/report/ecsv.hpp>
#include <trotline/report/json.hpp>

#include "gather_parts.hpp"

namespace trotline {
namespace {

class FolderPart : public GatherPart {
 public:
  FolderPart(std::filesystem::path folder, std::vector<std::string> contents)
      : folder_(std::move(folder)), contents_(std::move(contents)) {}

  void add(const GatheredJob& gathered) override {
    if (!gathered.result) return;
    OutputFolder output(folder_ / "sources" / safe_file_name(gathered.job.source) /
                        safe_file_name(gathered.job.species));
    if (wants("result")) output.write("result.json", result_json(*gathered.result));
    if (wants("lines")) output.write("lines.ecsv", lines_ecsv(*gathered.result));
    if (wants("diagram")) write_diagram(*gathered.result, output.staging());
    output.commit();
  }

  void finish() override {}

 private:
  [[nodiscard]] bool wants(const char* content) const {
    return std::find(contents_.begin(), contents_.end(), content) != contents_.end();
  }

  std::filesystem::path folder_;
  std::vector<std::string> contents_;
};

}  // namespace

std::unique_ptr<GatherPart> folder_part(const std::filesystem::path& folder,
                                        const std::vector<std::string>& contents) {
  return std::make_unique<FolderPart>(folder, contents);
}

}  // namespace trotline
