#pragma once

#include <string>
#include <vector>

namespace stillmass::report {

/// A label of a vertical mark, on a pole above the panel: it stands in a row (0 next to the panel) on the right or the
/// left of its pole, so that no label lies on another and, where it can be had, no pole runs through a label.
struct Flag {
  double at = 0.0;  ///< of the pole
  std::string text{};
  int row = 0;
  bool to_left = false;
};

/// Rows and sides of flags over a panel that reaches from 0 to `width`. Comes back sorted by `at`.
std::vector<Flag> placed_flags(std::vector<Flag> flags, double width, double text_size);

/// Places close to the wanted ones, in their order, at least `gap` apart and within lo to hi (as long as they fit).
std::vector<double> spread(const std::vector<double>& wanted, double gap, double lo, double hi);

struct Box {
  double left = 0.0, top = 0.0, right = 0.0, bottom = 0.0;
  bool overlaps(const Box& other) const {
    return left < other.right && other.left < right && top < other.bottom && other.top < bottom;
  }
};

/// A box of that size near the point (x, y): the first of the places above, right, left, below and further above that
/// lies in `frame` and on none of `taken`; failing all, the first place pushed into the frame.
Box placed_beside(double x, double y, double width, double height, const Box& frame, const std::vector<Box>& taken);

}  // namespace stillmass::report
