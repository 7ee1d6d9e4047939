#include <algorithm>
#include <cmath>
#include <numbers>
#include <optional>
#include <random>

#include <trotline/report/label_placement.hpp>

namespace trotline {
namespace {

// What a placement costs, in units of "the second-best place next to the point". Only the order of magnitude
// matters: an overlap must never pay, a leader is better than crossing two lines, and so on.
constexpr double kOverlap = 1000.0;
constexpr double kLeftOut = 300.0;
constexpr double kLeaderOverLabel = 320.0;
constexpr double kLeaderOverLeader = 40.0;
constexpr double kLeaderOverMarker = 25.0;
constexpr double kOverLine = 8.0;
constexpr double kGoodEnough = 2.0;  // for every label: then nothing is searched
constexpr double kLeader = 4.0;
constexpr double kLeaderPerLength = 0.3;   // in units of the label's height
constexpr double kLeaderPerSquare = 0.08;  // of the same
constexpr double kLeaderAside = 6.0;
constexpr double kAcross = std::numbers::pi / 4;
constexpr double kFarthest = 12.0;  // in units of the label's height

/// One place that a label may take.
struct Candidate {
  Box box;
  std::optional<Segment> leader;
  double cost = 0.0;
  Box reach = {};  ///< around box and leader, half a gap wider: what cannot meet need not be compared
};

Box box_around(double x, double y, double width, double height) {
  return {x - width / 2, y - height / 2, x + width / 2, y + height / 2};
}

Box grown(const Box& box, double by) {
  return {box.left - by, box.bottom - by, box.right + by, box.top + by};
}

bool is_inside(const Box& inner, const Box& outer) {
  return inner.left >= outer.left && inner.right <= outer.right && inner.bottom >= outer.bottom &&
         inner.top <= outer.top;
}

Box united(const Box& a, const Box& b) {
  return {std::min(a.left, b.left), std::min(a.bottom, b.bottom), std::max(a.right, b.right),
          std::max(a.top, b.top)};
}

Box box_of(const Segment& segment) {
  const auto [left, right] = std::minmax(segment.x0, segment.x1);
  const auto [bottom, top] = std::minmax(segment.y0, segment.y1);
  return {left, bottom, right, top};
}

bool covers_marker(const Box& box, const LabelRequest& label, double radius) {
  const double x = std::clamp(label.x, box.left, box.right);
  const double y = std::clamp(label.y, box.bottom, box.top);
  return std::hypot(x - label.x, y - label.y) < radius;
}

/// Places next to the point, best first: position relative to the point in half sizes of text and marker.
struct Place {
  double right;
  double up;
  double cost;
};
constexpr Place kNear[] = {{1, 1, 0.0},   {1, 0, 0.8},    {0, 1, 1.2},    {-1, -1, 1.0},
                           {-1, 0, 1.6},  {0, -1, 1.6},   {-1, 1, 2.0},   {1, -1, 2.0},
                           {0.5, 1, 0.9}, {-0.5, 1, 1.8}, {0.5, -1, 1.9}, {-0.5, -1, 1.5}};

Candidate near_candidate(const LabelRequest& label, const LabelScene& scene, const Place& place) {
  const double reach = scene.marker_radius + scene.gap;
  const bool diagonal = std::abs(place.right) == 1.0 && place.up != 0.0;
  // At a corner the marker's round edge lets the text come closer.
  const double closer = diagonal ? 0.6 : 1.0;
  const double x = label.x + place.right * (label.width / 2 + closer * reach);
  const double y = label.y + place.up * (label.height / 2 + closer * reach);
  return {box_around(x, y, label.width, label.height), std::nullopt, place.cost};
}

/// From the marker's edge to the nearest point of the label.
Segment leader_to(const Box& box, const LabelRequest& label, const LabelScene& scene) {
  const double x = std::clamp(label.x, box.left, box.right);
  const double y = std::clamp(label.y, box.bottom, box.top);
  const double length = std::hypot(x - label.x, y - label.y);
  const double start = length > 0.0 ? scene.marker_radius / length : 0.0;
  const double end = length > 0.0 ? 1.0 - 0.5 * scene.gap / length : 1.0;
  return {label.x + start * (x - label.x), label.y + start * (y - label.y), label.x + end * (x - label.x),
          label.y + end * (y - label.y)};
}

/// A place away from the point, with a leader.
Candidate far_candidate(const LabelRequest& label, const LabelScene& scene, double x, double y) {
  Candidate candidate{box_around(x, y, label.width, label.height), std::nullopt, 0.0};
  const Segment leader = leader_to(candidate.box, label, scene);
  const double length = std::hypot(leader.x1 - label.x, leader.y1 - label.y);
  const double angle = std::atan2(leader.y1 - label.y, leader.x1 - label.x);
  // Leaders that run alike do not cross: across a falling line, which leaves room above right and below left.
  const double aside = 1.0 - std::abs(std::cos(angle - kAcross));
  candidate.leader = leader;
  const double heights = length / label.height;
  candidate.cost = kLeader + (kLeaderPerLength + kLeaderPerSquare * heights) * heights + kLeaderAside * aside;
  return candidate;
}

bool is_allowed(const Candidate& candidate, const LabelScene& scene) {
  if (!is_inside(candidate.box, scene.frame)) return false;
  for (const LabelRequest& other : scene.labels) {
    if (covers_marker(candidate.box, other, scene.marker_radius)) return false;
  }
  return std::none_of(scene.forbidden.begin(), scene.forbidden.end(),
                      [&](const Box& box) { return overlap(candidate.box, box); });
}

/// What a place costs whatever the other labels do.
double cost_alone(const Candidate& candidate, const LabelScene& scene) {
  double cost = candidate.cost;
  for (const Segment& line : scene.lines) cost += crosses(line, candidate.box) ? kOverLine : 0.0;
  if (!candidate.leader) return cost;
  for (const LabelRequest& other : scene.labels) {
    const double side =
        1.6 * scene.marker_radius;  // a square inside of the marker: its own leader stays free
    cost += crosses(*candidate.leader, box_around(other.x, other.y, side, side)) ? kLeaderOverMarker : 0.0;
  }
  for (const Box& box : scene.forbidden) cost += crosses(*candidate.leader, box) ? kLeaderOverMarker : 0.0;
  return cost;
}

std::vector<Candidate> candidates_for(const LabelRequest& label, const LabelScene& scene) {
  std::vector<Candidate> candidates;
  const auto consider = [&](Candidate candidate) {
    if (!is_allowed(candidate, scene)) return;
    candidate.cost = cost_alone(candidate, scene);
    const Box all = candidate.leader ? united(candidate.box, box_of(*candidate.leader)) : candidate.box;
    candidate.reach = grown(all, scene.gap / 2);
    candidates.push_back(candidate);
  };
  for (const Place& place : kNear) consider(near_candidate(label, scene, place));
  // Away from the point, labels stand in common rows: they pack closer so, and look calmer.
  const double pitch = label.height + scene.gap;
  const auto rows = static_cast<int>((scene.frame.top - scene.frame.bottom) / pitch);
  for (int row = 0; row < rows; ++row) {
    const double y = scene.frame.top - (row + 0.5) * pitch;
    if (std::abs(y - label.y) > kFarthest * label.height) continue;
    for (const double away : {0.0, 0.4, 0.9, 1.5, 2.2, 3.0, 4.0, 5.2, 6.6, 8.4}) {
      const double reach = scene.marker_radius + away * label.height;
      consider(far_candidate(label, scene, label.x + reach + label.width / 2, y));
      consider(far_candidate(label, scene, label.x - reach - label.width / 2, y));
    }
    consider(far_candidate(label, scene, label.x, y));
  }
  std::stable_sort(candidates.begin(), candidates.end(),
                   [](const Candidate& a, const Candidate& b) { return a.cost < b.cost; });
  return candidates;
}

/// Leaders that meet where they start, at points close together, do not confuse.
Segment outer_part(const Segment& leader) {
  constexpr double kInner = 0.15;
  return {leader.x0 + kInner * (leader.x1 - leader.x0), leader.y0 + kInner * (leader.y1 - leader.y0),
          leader.x1, leader.y1};
}

double cost_between(const Candidate& a, const Candidate& b, double gap) {
  if (overlap(grown(a.box, gap), b.box)) return kOverlap;  // worse than all the rest
  double cost = 0.0;
  if (a.leader && crosses(*a.leader, grown(b.box, 0.4 * gap))) cost += kLeaderOverLabel;
  if (b.leader && crosses(*b.leader, grown(a.box, 0.4 * gap))) cost += kLeaderOverLabel;
  if (a.leader && b.leader && crosses(outer_part(*a.leader), outer_part(*b.leader)))
    cost += kLeaderOverLeader;
  return cost;
}

/// overlap() without branches: it is asked millions of times, and its answers do not repeat.
bool meets(const Box& a, const Box& b) {
  return static_cast<bool>(static_cast<int>(a.left < b.right) & static_cast<int>(b.left < a.right) &
                           static_cast<int>(a.bottom < b.top) & static_cast<int>(b.bottom < a.top));
}

/// The search: which candidate each label takes. kNone stands for a label left out.
class Search {
 public:
  explicit Search(const LabelScene& scene) : gap_(scene.gap) {
    for (const LabelRequest& label : scene.labels) candidates_.push_back(candidates_for(label, scene));
    choice_.assign(scene.labels.size(), kNone);
    cost_.assign(scene.labels.size(), kLeftOut);
    reach_.assign(scene.labels.size(), kNowhere);
  }

  void run() {
    descend();
    const auto is_dear = [](double cost) { return cost > kGoodEnough; };
    if (std::none_of(cost_.begin(), cost_.end(), is_dear)) return;
    anneal();
    descend();
    leave_out();
    descend();
    leave_out();
  }

  [[nodiscard]] const Candidate* chosen(std::size_t label) const {
    return choice_[label] == kNone ? nullptr : &candidates_[label][choice_[label]];
  }

 private:
  static constexpr std::size_t kNone = static_cast<std::size_t>(-1);

  /// A box that overlaps none.
  static constexpr Box kNowhere = {HUGE_VAL, HUGE_VAL, -HUGE_VAL, -HUGE_VAL};

  /// Calls use(other, cost between them) until it returns false.
  template <class Use>
  void for_each_neighbour(std::size_t label, const Candidate& candidate, Use use) const {
    for (std::size_t other = 0; other < reach_.size(); ++other) {
      if (!meets(candidate.reach, reach_[other]) || other == label) continue;
      if (!use(other, cost_between(candidate, candidates_[other][choice_[other]], gap_))) return;
    }
  }

  /// What a label would cost at a place; where that is more than `most`, something more than `most`.
  [[nodiscard]] double cost_of(std::size_t label, std::size_t choice, double most) const {
    double cost = candidates_[label][choice].cost;
    for_each_neighbour(label, candidates_[label][choice], [&](std::size_t, double more) {
      cost += more;
      return cost <= most;
    });
    return cost;
  }

  /// Moves a label, or leaves it out, and keeps the costs of the others up to date.
  void move(std::size_t label, std::size_t choice, double cost) {
    if (const Candidate* const before = chosen(label)) {
      for_each_neighbour(label, *before, [&](std::size_t other, double less) {
        cost_[other] -= less;
        return true;
      });
    }
    choice_[label] = choice;
    cost_[label] = cost;
    const Candidate* const after = chosen(label);
    reach_[label] = after ? after->reach : kNowhere;
    if (!after) return;
    for_each_neighbour(label, *after, [&](std::size_t other, double more) {
      cost_[other] += more;
      return true;
    });
  }

  /// Leaves out, the dearest first, what costs more where it is.
  void leave_out() {
    for (;;) {
      const auto dearest = std::max_element(cost_.begin(), cost_.end());
      if (dearest == cost_.end() || *dearest <= kLeftOut) return;
      move(static_cast<std::size_t>(dearest - cost_.begin()), kNone, kLeftOut);
    }
  }

  /// Each label in turn takes its cheapest place until none moves any more.
  void descend() {
    constexpr int kMostSweeps = 30;
    constexpr double kLeast = 1e-6;  // gains below it are rounding
    bool moved = true;
    for (int sweep = 0; sweep < kMostSweeps && moved; ++sweep) {
      moved = false;
      for (std::size_t label = 0; label < choice_.size(); ++label) {
        for (std::size_t choice = 0; choice < candidates_[label].size(); ++choice) {
          if (candidates_[label][choice].cost >= cost_[label] - kLeast) break;  // they are sorted
          const double cost = cost_of(label, choice, cost_[label]);
          if (cost >= cost_[label] - kLeast) continue;
          move(label, choice, cost);
          moved = true;
        }
      }
    }
  }

  void anneal() {
    std::mt19937 random(20260101);
    const auto uniform = [&] { return static_cast<double>(random()) / 4294967296.0; };
    const std::size_t steps = kStepsPerLabel * choice_.size();
    for (std::size_t step = 0; step < steps; ++step) {
      const double heat =
          kHot * std::pow(kCold / kHot, static_cast<double>(step) / static_cast<double>(steps));
      const std::size_t one = random() % choice_.size();
      const std::size_t two = random() % choice_.size();
      const std::size_t label = cost_[one] > cost_[two] ? one : two;  // the worse off moves
      if (candidates_[label].empty()) continue;
      // Squared: the cheap places, which stand first, are tried more often.
      const double pick = uniform() * uniform();
      const auto choice = static_cast<std::size_t>(pick * static_cast<double>(candidates_[label].size()));
      const double most = cost_[label] - heat * std::log(std::max(uniform(), 1e-300));
      if (choice == choice_[label] || candidates_[label][choice].cost > most) continue;
      const double cost = cost_of(label, choice, most);
      if (cost <= most) move(label, choice, cost);
    }
  }

  static constexpr std::size_t kStepsPerLabel = 6000;
  static constexpr double kHot = 30.0;
  static constexpr double kCold = 1.0;

  double gap_;
  std::vector<std::vector<Candidate>> candidates_;
  std::vector<std::size_t> choice_;
  std::vector<double> cost_;  ///< of each label where it is now
  std::vector<Box> reach_;    ///< of each label where it is now: asked most often, so kept together
};

double side(const Segment& s, double x, double y) {
  return (s.x1 - s.x0) * (y - s.y0) - (s.y1 - s.y0) * (x - s.x0);
}

}  // namespace

bool overlap(const Box& a, const Box& b) {
  return a.left < b.right && b.left < a.right && a.bottom < b.top && b.bottom < a.top;
}

bool crosses(const Segment& a, const Segment& b) {
  const double a0 = side(b, a.x0, a.y0);
  const double a1 = side(b, a.x1, a.y1);
  const double b0 = side(a, b.x0, b.y0);
  const double b1 = side(a, b.x1, b.y1);
  return a0 * a1 <= 0.0 && b0 * b1 <= 0.0 && (a0 != a1 || b0 != b1);
}

bool crosses(const Segment& segment, const Box& box) {
  const auto holds = [&](double x, double y) {
    return x >= box.left && x <= box.right && y >= box.bottom && y <= box.top;
  };
  if (std::max(segment.x0, segment.x1) < box.left || std::min(segment.x0, segment.x1) > box.right)
    return false;
  if (std::max(segment.y0, segment.y1) < box.bottom || std::min(segment.y0, segment.y1) > box.top)
    return false;
  if (holds(segment.x0, segment.y0) || holds(segment.x1, segment.y1)) return true;
  return crosses(segment, Segment{box.left, box.bottom, box.right, box.top}) ||
         crosses(segment, Segment{box.left, box.top, box.right, box.bottom});
}

std::vector<PlacedLabel> place_labels(const LabelScene& scene) {
  Search search(scene);
  search.run();
  std::vector<PlacedLabel> placed(scene.labels.size());
  for (std::size_t i = 0; i < placed.size(); ++i) {
    const Candidate* const candidate = search.chosen(i);
    if (!candidate) continue;
    placed[i] = {true, (candidate->box.left + candidate->box.right) / 2,
                 (candidate->box.bottom + candidate->box.top) / 2, candidate->leader.has_value(),
                 candidate->leader.value_or(Segment{})};
  }
  return placed;
}

}  // namespace trotline
