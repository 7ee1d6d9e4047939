#pragma once

#include <vector>

namespace trotline {

/// A rectangle; left <= right and bottom <= top. Any unit of length, the same throughout.
struct Box {
  double left = 0.0;
  double bottom = 0.0;
  double right = 0.0;
  double top = 0.0;
};

struct Segment {
  double x0 = 0.0;
  double y0 = 0.0;
  double x1 = 0.0;
  double y1 = 0.0;
};

/// A text of known size that belongs to a point.
struct LabelRequest {
  double x = 0.0;
  double y = 0.0;
  double width = 0.0;
  double height = 0.0;
};

/// What the labels have to respect.
struct LabelScene {
  Box frame;                         ///< no label leaves it
  std::vector<LabelRequest> labels;  ///< every point of them is a marker as well
  std::vector<Box> forbidden;        ///< no label covers them
  std::vector<Segment> lines;        ///< labels would rather not cover them
  double marker_radius = 1.0;        ///< of the points, which no label covers
  double gap = 0.5;                  ///< between a label and its marker, and between two labels
};

struct PlacedLabel {
  bool placed = false;  ///< false: no room; the label is better left out
  double x = 0.0;       ///< center of the text
  double y = 0.0;
  bool has_leader = false;  ///< the label stands away from its point
  Segment leader;           ///< from the marker's edge to the label
};

/// Places labels so that none overlaps another, a marker or a forbidden box, and none leaves the frame. A
/// label stands next to its point where it can, above at the right by preference, and else farther off with a
/// leader line, which crosses no label; one that fits nowhere is left out. Same scene, same placement: the
/// search is an annealing with a fixed seed (Kirkpatrick, Gelatt & Vecchi 1983, Science 220, 671).
/// @return one entry a label, in the order given
/// Cost: grows as the square of the number of labels; 40 crowded ones take about a tenth of a second.
[[nodiscard]] std::vector<PlacedLabel> place_labels(const LabelScene& scene);

/// True when the interiors of two boxes meet.
[[nodiscard]] bool overlap(const Box& a, const Box& b);

/// True when a segment meets a box.
[[nodiscard]] bool crosses(const Segment& segment, const Box& box);

/// True when two segments meet.
[[nodiscard]] bool crosses(const Segment& a, const Segment& b);

}  // namespace trotline
