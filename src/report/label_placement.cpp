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
constexpr double kLeaderOverLabel = 60.0;
constexpr double kLeaderOverLeader = 40.0;
constexpr double kLeaderOverMarker = 12.0;
constexpr double kOverLine = 2.5;
constexpr double kLeader = 4.0;
constexpr double kLeaderPerLength = 0.5;  // in units of the label's height

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

Candidate far_candidate(const LabelRequest& label, const LabelScene& scene, double distance, double angle) {
  const double right = std::clamp(1.5 * std::cos(angle), -1.0, 1.0);
  const double up = std::clamp(1.5 * std::sin(angle), -1.0, 1.0);
  const double x = label.x + distance * std::cos(angle) + right * label.width / 2;
  const double y = label.y + distance * std::sin(angle) + up * label.height / 2;
  Candidate candidate{box_around(x, y, label.width, label.height), std::nullopt, 0.0};
  candidate.leader = leader_to(candidate.box, label, scene);
  // Above right and below left lie beside a falling line.
  const double aside = 1.0 - std::abs(std::cos(angle - std::numbers::pi / 4));
  candidate.cost = kLeader + kLeaderPerLength * distance / label.height + aside;
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
  constexpr int kDirections = 24;
  for (const double heights : {1.0, 1.7, 2.5, 3.5, 4.7, 6.0, 7.5, 9.0, 11.0, 13.5}) {
    for (int i = 0; i < kDirections; ++i) {
      const double angle = 2.0 * std::numbers::pi * i / kDirections;
      consider(far_candidate(label, scene, scene.marker_radius + heights * label.height, angle));
    }
  }
  std::stable_sort(candidates.begin(), candidates.end(),
                   [](const Candidate& a, const Candidate& b) { return a.cost < b.cost; });
  return candidates;
}

double cost_between(const Candidate& a, const Candidate& b, double gap) {
  if (!overlap(a.reach, b.reach)) return 0.0;
  double cost = overlap(grown(a.box, gap / 2), grown(b.box, gap / 2)) ? kOverlap : 0.0;
  if (a.leader && crosses(*a.leader, b.box)) cost += kLeaderOverLabel;
  if (b.leader && crosses(*b.leader, a.box)) cost += kLeaderOverLabel;
  if (a.leader && b.leader && crosses(*a.leader, *b.leader)) cost += kLeaderOverLeader;
  return cost;
}

/// The search: which candidate each label takes. kNone stands for a label left out.
class Search {
 public:
  explicit Search(const LabelScene& scene) : scene_(scene) {
    for (const LabelRequest& label : scene.labels) candidates_.push_back(candidates_for(label, scene));
    choice_.assign(scene.labels.size(), kNone);
  }

  void run() {
    descend();
    if (!is_crowded()) return;
    anneal();
    descend();
  }

  [[nodiscard]] const Candidate* chosen(std::size_t label) const {
    return choice_[label] == kNone ? nullptr : &candidates_[label][choice_[label]];
  }

 private:
  static constexpr std::size_t kNone = static_cast<std::size_t>(-1);

  [[nodiscard]] double cost_of(std::size_t label, std::size_t choice) const {
    if (choice == kNone) return kLeftOut;
    const Candidate& candidate = candidates_[label][choice];
    double cost = candidate.cost;
    for (std::size_t other = 0; other < choice_.size(); ++other) {
      const Candidate* const taken = other == label ? nullptr : chosen(other);
      if (taken) cost += cost_between(candidate, *taken, scene_.gap);
    }
    return cost;
  }

  /// Each label in turn takes its cheapest place until none moves any more.
  void descend() {
    for (int sweep = 0; sweep < 30; ++sweep) {
      bool moved = false;
      for (std::size_t label = 0; label < choice_.size(); ++label) {
        double best = cost_of(label, choice_[label]);
        for (std::size_t choice = 0; choice < candidates_[label].size(); ++choice) {
          if (candidates_[label][choice].cost >= best) break;  // they are sorted
          const double cost = cost_of(label, choice);
          if (cost >= best) continue;
          best = cost;
          choice_[label] = choice;
          moved = true;
        }
      }
      if (!moved) return;
    }
  }

  [[nodiscard]] bool is_crowded() const {
    for (std::size_t label = 0; label < choice_.size(); ++label) {
      if (cost_of(label, choice_[label]) > kLeader) return true;
    }
    return false;
  }

  void anneal() {
    std::mt19937 random(20260101);
    const auto uniform = [&] { return static_cast<double>(random()) / 4294967296.0; };
    const std::size_t steps = 1500 * choice_.size();
    constexpr double kHot = 12.0;
    constexpr double kCold = 0.2;
    for (std::size_t step = 0; step < steps; ++step) {
      const double heat =
          kHot * std::pow(kCold / kHot, static_cast<double>(step) / static_cast<double>(steps));
      const std::size_t label = random() % choice_.size();
      if (candidates_[label].empty()) continue;
      // Squared: the cheap places, which stand first, are tried more often.
      const double pick = uniform() * uniform();
      const auto choice = static_cast<std::size_t>(pick * static_cast<double>(candidates_[label].size()));
      const double change = cost_of(label, choice) - cost_of(label, choice_[label]);
      if (change <= 0.0 || uniform() < std::exp(-change / heat)) choice_[label] = choice;
    }
  }

  const LabelScene& scene_;
  std::vector<std::vector<Candidate>> candidates_;
  std::vector<std::size_t> choice_;
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
