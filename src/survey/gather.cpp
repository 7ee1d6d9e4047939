#include <tbb/global_control.h>
#include <tbb/info.h>
#include <tbb/parallel_pipeline.h>
#include <tbb/task_arena.h>

#include <algorithm>
#include <memory>

#include <trotline/base/files.hpp>
#include <trotline/report/json_line.hpp>
#include <trotline/survey/gather.hpp>

#include "gather_parts.hpp"

namespace trotline {
namespace {

constexpr std::size_t kJobsPerThread = 16;

/// Hands every job to `take` by position, results parsed by several threads.
void for_each_job(Ledger& ledger, int threads, const std::function<void(const GatheredJob&)>& take) {
  const auto next = ledger.jobs();
  using Item = std::shared_ptr<GatheredJob>;
  const int workers = threads > 0 ? threads : tbb::info::default_concurrency();
  const tbb::global_control limit(tbb::global_control::max_allowed_parallelism,
                                  static_cast<std::size_t>(workers));
  tbb::task_arena arena(workers);
  arena.execute([&] {
    using tbb::filter_mode;
    tbb::parallel_pipeline(
        static_cast<std::size_t>(workers) * kJobsPerThread,
        tbb::make_filter<void, Item>(filter_mode::serial_in_order, [&](tbb::flow_control& control) -> Item {
          auto job = next();
          if (!job) {
            control.stop();
            return nullptr;
          }
          return std::make_shared<GatheredJob>(GatheredJob{std::move(*job), {}});
        }) & tbb::make_filter<Item, Item>(filter_mode::parallel, [](const Item& item) {
          std::string& json = item->job.result_json;
          if (!json.empty()) item->result = parse_result_json(json);
          json = {};
          return item;
        }) & tbb::make_filter<Item, void>(filter_mode::serial_in_order, [&](const Item& item) {
          take(*item);
        }));
  });
}

/// Folders that a killed run left half made; the caller holds the lock, so nobody is at work in them.
void remove_leftovers(const std::filesystem::path& folder) {
  std::error_code ignored;
  for (const auto& entry : std::filesystem::directory_iterator(folder, ignored)) {
    const std::string name = entry.path().filename().string();
    if (name.starts_with(".making-") && name.size() == 14) std::filesystem::remove_all(entry.path(), ignored);
  }
}

}  // namespace

Gathered gather(Ledger& ledger, const std::filesystem::path& folder, const GatherOptions& options) {
  remove_leftovers(folder);
  remove_leftovers(folder / "figures");
  Gathered gathered;
  OutputFolder output(folder);
  std::unique_ptr<FigurePart> figures;
  std::vector<std::unique_ptr<GatherPart>> parts;
  if (!options.outputs.tables.empty()) parts.push_back(table_part(ledger, output.staging(), options));
  if (!options.outputs.folders.empty()) parts.push_back(folder_part(folder, options.outputs.folders));
  if (options.outputs.figures) figures = std::make_unique<FigurePart>(ledger, folder);
  if (options.outputs.page)
    parts.push_back(page_part(ledger, output.staging(), options.title, figures.get()));
  for_each_job(ledger, options.threads, [&](const GatheredJob& job) {
    if (figures) figures->add(job);
    for (const auto& part : parts) part->add(job);
  });
  if (figures) figures->finish();  // before the page, which shows them
  for (const auto& part : parts) part->finish();
  gathered.files = output.commit();
  if (figures) {
    gathered.warnings = figures->warnings();
    gathered.files.emplace_back("figures/");
  }
  if (!options.outputs.folders.empty()) gathered.files.emplace_back("sources/");
  return gathered;
}

}  // namespace trotline
