#include "line_list_levels.hpp"

#include <fmt/format.h>

#include <algorithm>
#include <cmath>
#include <cstring>
#include <numeric>
#include <optional>
#include <unordered_map>

#include <trotline/base/errors.hpp>
#include <trotline/base/text.hpp>
#include <trotline/physics/constants.hpp>
#include <trotline/species/species.hpp>

#include "line_list_labels.hpp"

namespace trotline {
namespace {

constexpr double kMhzPerWavenumberCm = constants::kLightMPerS * 100.0 * 1e-6;

/// A row, or a pair of rows that are one line.
struct KeptRow {
  std::size_t row = 0;
  int copies = 1;
};

/// A level while its rows are being gathered. Its degeneracy is that of one copy.
struct Draft {
  Quanta quanta = {};
  double energy_per_cm = 0.0;
  bool energy_printed = false;  ///< as that of a lower state; else it was computed
  double degeneracy = 0.0;      ///< 0: not known yet
  int copies = 1;
  std::size_t row = 0;  ///< where it was first met
};

/// Bytes as a key of a hash table.
template <class... Parts>
std::string key_of(const Parts&... parts) {
  std::string key;
  (key.append(reinterpret_cast<const char*>(&parts), sizeof parts), ...);
  return key;
}

/// The quantum number that is the total angular momentum, and how it is printed.
struct Momentum {
  std::size_t index = 0;
  bool half = false;  ///< rounded up: 2 stands for 3/2

  /// 2F + 1.
  [[nodiscard]] double weight(const Quanta& quanta) const {
    return half ? 2.0 * quanta[index] : 2.0 * quanta[index] + 1.0;
  }
};

class Rebuilder {
 public:
  Rebuilder(const LineList& list, const LineListReading& reading, const std::string& file)
      : list_(list), reading_(reading), file_(file) {
    check_formats();
    style_ = style_for(list, names());
    const auto k = std::find(style_.names.begin(), style_.names.end(), "K");
    if (k != style_.names.end()) k_ = static_cast<std::size_t>(k - style_.names.begin());
  }

  ListedLevels build() {
    pair_rows();
    gather_levels();
    find_degeneracies();
    return finished();
  }

 private:
  using Found = std::unordered_map<std::string, std::uint32_t>;

  // ---- what the quantum numbers are

  void check_formats() const {
    const LineListRow& first = list_.rows.front();
    for (std::size_t i = 0; i < list_.rows.size(); ++i) {
      if (list_.rows[i].quantum_format == first.quantum_format) continue;
      refuse(i, {fmt::format("the quantum-number format is {}, but {} in the first row",
                             list_.rows[i].quantum_format, first.quantum_format),
                 "rows of one format"});
    }
  }

  [[nodiscard]] std::vector<std::string> names() const {
    const LineListRow& first = list_.rows.front();
    const auto n = static_cast<std::size_t>(first.quanta);
    if (reading_.quanta.empty()) {
      const auto usual = usual_quanta(first.quantum_format);
      if (!usual.empty()) return usual;
      refuse(0, {fmt::format("what the {} quantum numbers of format {} are is not known", n,
                             first.quantum_format),
                 "their names in the species file, e.g. 'quantum_numbers: [J, K, F]'"});
    }
    if (reading_.quanta.size() != n) {
      refuse(0, {fmt::format("the rows have {} quantum numbers, the species file names {}", n,
                             reading_.quanta.size()),
                 "a name for each"});
    }
    return reading_.quanta;
  }

  // ---- rows that are one line

  [[nodiscard]] Quanta without_sign_of_k(Quanta quanta) const {
    if (k_) quanta[*k_] = static_cast<std::int16_t>(std::abs(quanta[*k_]));
    return quanta;
  }

  void pair_rows() {
    Found found;
    found.reserve(list_.rows.size());
    for (std::size_t i = 0; i < list_.rows.size(); ++i) {
      const LineListRow& row = list_.rows[i];
      const std::string key =
          key_of(row.frequency_mhz, row.log10_intensity, row.lower_energy_per_cm, row.upper_degeneracy,
                 without_sign_of_k(row.upper), without_sign_of_k(row.lower));
      const auto [place, is_new] = found.emplace(key, static_cast<std::uint32_t>(kept_.size()));
      if (is_new) {
        kept_.push_back({i, 1});
      } else {
        add_copy(kept_[place->second], i);
      }
    }
    if (reading_.doubled == DoubledRows::once) {
      for (KeptRow& kept : kept_) kept.copies = 1;
    }
    warn_of_copies();
  }

  void add_copy(KeptRow& kept, std::size_t row) const {
    const LineListRow& first = list_.rows[kept.row];
    const bool has_k = k_ && (first.upper[*k_] != 0 || first.lower[*k_] != 0);
    if (reading_.doubled == DoubledRows::plus_and_minus_k && !has_k) {
      refuse(row, {fmt::format("the row repeats line {}, and is no pair of +K and -K",
                               list_.line_numbers[kept.row]),
                   "each line once, or 'doubled_rows: sum' (two lines that coincide) or 'doubled_rows: once' "
                   "(a slip) in "
                   "the species file"});
    }
    if (++kept.copies > 2 && reading_.doubled != DoubledRows::once) {
      refuse(row, {fmt::format("the row stands in the list for the third time (first in line {})",
                               list_.line_numbers[kept.row]),
                   "rows that are printed once or twice"});
    }
  }

  void warn_of_copies() {
    const auto pairs =
        std::count_if(kept_.begin(), kept_.end(), [](const KeptRow& kept) { return kept.copies == 2; });
    if (pairs == 0) return;
    warnings_.push_back(fmt::format(
        "{} pairs of rows that coincide are one line each, between levels of twice the weight", pairs));
    const auto all = static_cast<std::ptrdiff_t>(kept_.size());
    if (pairs == all)
      warnings_.emplace_back("every row is printed twice: make sure that the file is not joined to itself");
  }

  // ---- levels

  void gather_levels() {
    Found found;
    for (const KeptRow& kept : kept_) {
      const std::uint32_t lower = level_of(found, list_.rows[kept.row].lower, kept);
      const std::uint32_t upper = level_of(found, list_.rows[kept.row].upper, kept);
      ends_.emplace_back(upper, lower);
      note_lower(drafts_[lower], kept.row);
      note_upper(drafts_[upper], kept.row);
    }
  }

  std::uint32_t level_of(Found& found, const Quanta& printed, const KeptRow& kept) {
    const Quanta quanta = kept.copies > 1 ? without_sign_of_k(printed) : printed;
    const auto [place, is_new] = found.emplace(key_of(quanta), static_cast<std::uint32_t>(drafts_.size()));
    if (is_new) {
      drafts_.push_back(
          {quanta, std::numeric_limits<double>::quiet_NaN(), false, 0.0, kept.copies, kept.row});
    }
    Draft& draft = drafts_[place->second];
    draft.copies = std::max(draft.copies, kept.copies);
    return place->second;
  }

  void note_lower(Draft& draft, std::size_t row) const {
    const double energy = list_.rows[row].lower_energy_per_cm;
    check_energy(draft, energy, row);
    if (!draft.energy_printed) draft.energy_per_cm = energy;
    draft.energy_printed = true;
  }

  void note_upper(Draft& draft, std::size_t row) const {
    const LineListRow& listed = list_.rows[row];
    const double energy = listed.lower_energy_per_cm + listed.frequency_mhz / kMhzPerWavenumberCm;
    check_energy(draft, energy, row);
    if (std::isnan(draft.energy_per_cm)) draft.energy_per_cm = energy;
    if (draft.degeneracy != 0.0 && draft.degeneracy != listed.upper_degeneracy) {
      refuse(row, {fmt::format("the upper level '{}' has the degeneracy {} here, but {} in another row",
                               label(draft), listed.upper_degeneracy, draft.degeneracy),
                   "one degeneracy for a level", kAdviceOnQuanta});
    }
    draft.degeneracy = listed.upper_degeneracy;
  }

  /// Energies are printed to 1e-4 cm-1, and a measured line may differ from the predicted energies.
  void check_energy(const Draft& draft, double energy_per_cm, std::size_t row) const {
    const double tolerance = 0.01 + 5.0 * list_.rows[row].frequency_sigma_mhz / kMhzPerWavenumberCm;
    if (std::isnan(draft.energy_per_cm) || std::abs(energy_per_cm - draft.energy_per_cm) <= tolerance) return;
    refuse(row, {fmt::format("the level '{}' lies at {:.4f} cm-1 here, but at {:.4f} cm-1 in line {}",
                             label(draft), energy_per_cm, draft.energy_per_cm, list_.line_numbers[draft.row]),
                 "one energy for a level", kAdviceOnQuanta});
  }

  // ---- degeneracies of levels that are upper in no row

  void find_degeneracies() {
    take_stated_degeneracies();
    const auto is_open = [](const Draft& draft) { return draft.degeneracy == 0.0; };
    const auto open = std::find_if(drafts_.begin(), drafts_.end(), is_open);
    const auto momentum = find_momentum();
    if (momentum && momentum->half) style_.half[momentum->index] = true;
    if (open == drafts_.end()) return;
    if (!momentum) {
      refuse(open->row,
             {fmt::format("the level '{}' is the upper one of no row, and which quantum number its "
                          "degeneracy goes with cannot be told",
                          label(*open)),
              fmt::format("its degeneracy in the species file, e.g. 'degeneracies: {{\"{}\": 1}}'",
                          label(*open))});
    }
    for (std::size_t i = 0; i < kept_.size(); ++i) take_weight(*momentum, i);
  }

  void take_stated_degeneracies() {
    for (const auto& [name, degeneracy] : reading_.degeneracies) {
      const auto named = [&](const Draft& draft) {
        return normalised_label(label(draft)) == normalised_label(name);
      };
      const auto draft = std::find_if(drafts_.begin(), drafts_.end(), named);
      if (draft == drafts_.end()) {
        throw InputError(
            {file_},
            {fmt::format("there is no level '{}', whose degeneracy the species file states", printable(name)),
             fmt::format("a label such as '{}'", label(drafts_.front()))});
      }
      if (draft->degeneracy != 0.0 && draft->degeneracy != degeneracy) {
        refuse(draft->row,
               {fmt::format("the level '{}' has the degeneracy {} in the list, but {} in the species file",
                            label(*draft), draft->degeneracy, degeneracy),
                "one degeneracy for a level"});
      }
      draft->degeneracy = degeneracy;
    }
  }

  /// The first plausible quantum number for which g/(2F+1) is the same at both ends of every row, and a whole
  /// or half number. Names say which to try first.
  [[nodiscard]] std::optional<Momentum> find_momentum() const {
    std::vector<std::size_t> order;
    for (const char* name : {"F", "J", "N"}) {
      for (std::size_t i = 0; i < style_.names.size(); ++i) {
        if (style_.names[i] == name) order.push_back(i);
      }
    }
    for (std::size_t i = style_.names.size(); i-- > 0;) order.push_back(i);
    for (const std::size_t index : order) {
      const bool marked = list_.rows.front().is_half_integer(static_cast<int>(index));
      for (const bool half : {marked, !marked}) {
        if (is_momentum({index, half})) return Momentum{index, half};
      }
    }
    return std::nullopt;
  }

  [[nodiscard]] bool is_momentum(const Momentum& momentum) const {
    for (const auto& [upper, lower] : ends_) {
      const double upper_weight = momentum.weight(drafts_[upper].quanta);
      const double lower_weight = momentum.weight(drafts_[lower].quanta);
      if (upper_weight <= 0.0 || lower_weight <= 0.0) return false;
      const double twice_spin = 2.0 * drafts_[upper].degeneracy / upper_weight;
      if (twice_spin != std::round(twice_spin)) return false;
      const double lower_degeneracy = drafts_[lower].degeneracy;
      if (lower_degeneracy != 0.0 &&
          lower_degeneracy * upper_weight != drafts_[upper].degeneracy * lower_weight) {
        return false;
      }
    }
    return true;
  }

  void take_weight(const Momentum& momentum, std::size_t i) {
    const Draft& upper = drafts_[ends_[i].first];
    Draft& lower = drafts_[ends_[i].second];
    const double degeneracy =
        upper.degeneracy / momentum.weight(upper.quanta) * momentum.weight(lower.quanta);
    if (lower.degeneracy == 0.0) lower.degeneracy = degeneracy;
    if (lower.degeneracy == degeneracy) return;
    refuse(kept_[i].row,
           {fmt::format("the lower level '{}' would have the degeneracy {} by this row, but {} by others",
                        label(lower), degeneracy, lower.degeneracy),
            "one degeneracy for a level", kAdviceOnQuanta});
  }

  // ---- the result

  [[nodiscard]] ListedLevels finished() {
    ListedLevels out;
    const std::vector<std::uint32_t> place = take_levels(out);
    for (std::size_t i = 0; i < kept_.size(); ++i) {
      const LineListRow& row = list_.rows[kept_[i].row];
      const Transition line = {place[ends_[i].first], place[ends_[i].second], row.frequency_mhz * 1e6,
                               row.frequency_sigma_mhz * 1e6, 0.0};
      out.transitions.push_back({line, kept_[i].row});
    }
    std::stable_sort(out.transitions.begin(), out.transitions.end(), [](const auto& a, const auto& b) {
      return a.transition.frequency_hz < b.transition.frequency_hz;
    });
    out.warnings = std::move(warnings_);
    return out;
  }

  /// Fills the levels by rising energy; gives the place of each draft.
  std::vector<std::uint32_t> take_levels(ListedLevels& out) {
    std::vector<std::uint32_t> order(drafts_.size());
    std::iota(order.begin(), order.end(), 0U);
    std::stable_sort(order.begin(), order.end(),
                     [&](auto a, auto b) { return drafts_[a].energy_per_cm < drafts_[b].energy_per_cm; });
    const double zero = zero_of(drafts_[order.front()].energy_per_cm);
    std::vector<std::uint32_t> place(drafts_.size());
    for (std::uint32_t i = 0; i < order.size(); ++i) {
      const Draft& draft = drafts_[order[i]];
      place[order[i]] = i;
      out.levels.push_back({label(draft), (draft.energy_per_cm - zero) * constants::kKelvinPerWavenumberCm,
                            draft.copies * draft.degeneracy, ""});
    }
    return place;
  }

  /// Roundings below 0 become 0; a list whose lowest level lies above 0 keeps its zero, for which its Q
  /// holds.
  double zero_of(double lowest_per_cm) {
    constexpr double kPrinted = 1e-4;
    if (lowest_per_cm <= kPrinted) return lowest_per_cm;
    warnings_.push_back(fmt::format(
        "the lowest level of the list lies at {:.4f} cm-1: energies and Q count from the list's zero, and "
        "levels below may be missing",
        lowest_per_cm));
    return 0.0;
  }

  [[nodiscard]] std::string label(const Draft& draft) const { return label_of(draft.quanta, style_); }

  [[noreturn]] void refuse(std::size_t row, const Complaint& complaint) const {
    throw InputError({file_, list_.line_numbers[row]}, complaint);
  }

  static constexpr const char* kAdviceOnQuanta =
      "the quantum numbers may leave out what tells two states apart";

  const LineList& list_;
  const LineListReading& reading_;
  const std::string& file_;
  LabelStyle style_;
  std::optional<std::size_t> k_;
  std::vector<KeptRow> kept_;
  std::vector<Draft> drafts_;
  std::vector<std::pair<std::uint32_t, std::uint32_t>> ends_;  ///< upper and lower draft of each kept row
  std::vector<std::string> warnings_;
};

}  // namespace

ListedLevels rebuild_levels(const LineList& list, const LineListReading& reading, const std::string& file) {
  return Rebuilder(list, reading, file).build();
}

}  // namespace trotline
