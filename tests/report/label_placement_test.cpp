#include <gtest/gtest.h>

#include <algorithm>
#include <cmath>
#include <random>

#include <trotline/report/label_placement.hpp>

namespace trotline {
namespace {

constexpr double kRadius = 0.9;

/// Labels of a usual size [mm] along a falling line in a panel of a usual size.
LabelScene scene_on_a_line(int labels, unsigned seed, double scatter = 1.5) {
  LabelScene scene;
  scene.frame = {10.0, 32.0, 86.0, 79.0};
  scene.marker_radius = kRadius;
  std::mt19937 random(seed);
  std::uniform_real_distribution<double> along(0.05, 0.95);
  std::normal_distribution<double> off(0.0, scatter);
  std::uniform_real_distribution<double> width(5.0, 12.0);
  for (int i = 0; i < labels; ++i) {
    const double t = along(random);
    scene.labels.push_back({10.0 + 76.0 * t, 77.0 - 43.0 * t + off(random), width(random), 2.5});
  }
  scene.lines.push_back({10.0, 77.0, 86.0, 34.0});
  scene.forbidden.push_back({50.0, 66.0, 86.0, 79.0});
  return scene;
}

Box box_of(const PlacedLabel& placed, const LabelRequest& label) {
  return {placed.x - label.width / 2, placed.y - label.height / 2, placed.x + label.width / 2,
          placed.y + label.height / 2};
}

bool is_inside(const Box& inner, const Box& outer) {
  return inner.left >= outer.left && inner.right <= outer.right && inner.bottom >= outer.bottom &&
         inner.top <= outer.top;
}

void expect_sound(const LabelScene& scene, const std::vector<PlacedLabel>& placed) {
  ASSERT_EQ(placed.size(), scene.labels.size());
  for (std::size_t i = 0; i < placed.size(); ++i) {
    if (!placed[i].placed) continue;
    const Box box = box_of(placed[i], scene.labels[i]);
    EXPECT_TRUE(is_inside(box, scene.frame)) << i;
    for (const Box& forbidden : scene.forbidden) EXPECT_FALSE(overlap(box, forbidden)) << i;
    for (std::size_t k = 0; k < placed.size(); ++k) {
      const LabelRequest& other = scene.labels[k];
      const double x = std::clamp(other.x, box.left, box.right);
      const double y = std::clamp(other.y, box.bottom, box.top);
      EXPECT_GE(std::hypot(x - other.x, y - other.y), kRadius) << "the label covers a marker";
      if (k == i || !placed[k].placed) continue;
      EXPECT_FALSE(placed[k].has_leader && crosses(placed[k].leader, box)) << "a leader crosses a label";
      EXPECT_FALSE(overlap(box, box_of(placed[k], other))) << i << " " << k;
    }
  }
}

std::size_t count_placed(const std::vector<PlacedLabel>& placed) {
  std::size_t count = 0;
  for (const PlacedLabel& label : placed) count += label.placed ? 1 : 0;
  return count;
}

TEST(LabelPlacement, PutsASingleLabelAboveAtTheRightWithoutLeader) {
  LabelScene scene;
  scene.frame = {0.0, 0.0, 80.0, 50.0};
  scene.labels = {{40.0, 25.0, 10.0, 2.5}};
  const auto placed = place_labels(scene);
  ASSERT_TRUE(placed[0].placed);
  EXPECT_FALSE(placed[0].has_leader);
  EXPECT_GT(placed[0].x, 40.0);
  EXPECT_GT(placed[0].y, 25.0);
}

TEST(LabelPlacement, StaysInsideTheFrameAtItsCorners) {
  for (const double x : {0.5, 79.5}) {
    for (const double y : {0.5, 49.5}) {
      LabelScene scene;
      scene.frame = {0.0, 0.0, 80.0, 50.0};
      scene.marker_radius = kRadius;
      scene.labels = {{x, y, 10.0, 2.5}};
      const auto placed = place_labels(scene);
      EXPECT_TRUE(placed[0].placed);
      expect_sound(scene, placed);
    }
  }
}

TEST(LabelPlacement, PlacesAllOfThirtyLabelsWithoutOverlap) {
  for (const int labels : {2, 5, 10, 20, 30}) {
    for (unsigned seed = 0; seed < 5; ++seed) {
      const LabelScene scene = scene_on_a_line(labels, seed);
      const auto placed = place_labels(scene);
      expect_sound(scene, placed);
      EXPECT_EQ(count_placed(placed), static_cast<std::size_t>(labels)) << labels << " labels, seed " << seed;
    }
  }
}

// Forty labels of 5 to 12 mm fill a third of the panel that the result's own text leaves, and their points
// stand on one line: now and then one is better left out than crossed by a leader.
TEST(LabelPlacement, PlacesNearlyAllOfFortyLabelsWithoutOverlap) {
  for (unsigned seed = 0; seed < 5; ++seed) {
    const LabelScene scene = scene_on_a_line(40, seed);
    const auto placed = place_labels(scene);
    expect_sound(scene, placed);
    EXPECT_GE(count_placed(placed), 38U) << "seed " << seed;
  }
}

TEST(LabelPlacement, DrawsALeaderWhereTheLabelHasMovedAway) {
  const LabelScene scene = scene_on_a_line(30, 3, 0.2);
  const auto placed = place_labels(scene);
  std::size_t leaders = 0;
  for (std::size_t i = 0; i < placed.size(); ++i) {
    const LabelRequest& label = scene.labels[i];
    const Box near = {label.x - label.width - 3.0, label.y - label.height - 3.0, label.x + label.width + 3.0,
                      label.y + label.height + 3.0};
    if (!placed[i].placed) continue;
    if (!placed[i].has_leader) {
      EXPECT_TRUE(is_inside(box_of(placed[i], label), near)) << i;
      continue;
    }
    ++leaders;
    const Segment& leader = placed[i].leader;
    EXPECT_NEAR(std::hypot(leader.x0 - label.x, leader.y0 - label.y), kRadius, 1e-9)
        << "starts at the marker";
    const Box box = box_of(placed[i], label);
    const Box reach = {box.left - 0.5, box.bottom - 0.5, box.right + 0.5, box.top + 0.5};
    EXPECT_TRUE(crosses(leader, reach)) << "ends at the label";
  }
  EXPECT_GT(leaders, 0U) << "thirty points on one line cannot all have their label beside them";
}

TEST(LabelPlacement, LeavesOutWhatHasNoRoom) {
  LabelScene scene;
  scene.frame = {0.0, 0.0, 20.0, 6.0};
  scene.marker_radius = kRadius;
  for (int i = 0; i < 12; ++i) scene.labels.push_back({10.0, 3.0, 8.0, 2.5});
  const auto placed = place_labels(scene);
  expect_sound(scene, placed);
  EXPECT_LT(count_placed(placed), 12U);
  EXPECT_GT(count_placed(placed), 0U);
}

TEST(LabelPlacement, LeavesOutALabelWiderThanTheFrame) {
  LabelScene scene;
  scene.frame = {0.0, 0.0, 20.0, 20.0};
  scene.labels = {{10.0, 10.0, 25.0, 2.5}};
  EXPECT_FALSE(place_labels(scene)[0].placed);
}

TEST(LabelPlacement, IsTheSameEveryTime) {
  const LabelScene scene = scene_on_a_line(35, 8);
  const auto first = place_labels(scene);
  const auto second = place_labels(scene);
  for (std::size_t i = 0; i < first.size(); ++i) {
    EXPECT_EQ(first[i].x, second[i].x);
    EXPECT_EQ(first[i].y, second[i].y);
  }
}

TEST(LabelPlacement, StandsNoLabelsAtAll) { EXPECT_TRUE(place_labels(LabelScene{}).empty()); }

TEST(Geometry, KnowsWhatMeets) {
  EXPECT_TRUE(overlap({0, 0, 2, 2}, {1, 1, 3, 3}));
  EXPECT_FALSE(overlap({0, 0, 2, 2}, {2, 0, 3, 2})) << "a common edge is no overlap";
  EXPECT_TRUE(crosses(Segment{0, 0, 2, 2}, Segment{0, 2, 2, 0}));
  EXPECT_FALSE(crosses(Segment{0, 0, 1, 1}, Segment{2, 2, 3, 0}));
  EXPECT_TRUE(crosses(Segment{-1, 1, 3, 1}, Box{0, 0, 2, 2}));
  EXPECT_TRUE(crosses(Segment{1, 1, 1.5, 1.5}, Box{0, 0, 2, 2})) << "inside";
  EXPECT_FALSE(crosses(Segment{-1, 3, 3, 3}, Box{0, 0, 2, 2}));
}

}  // namespace
}  // namespace trotline
