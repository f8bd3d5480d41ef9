#include "report/svg_labels.hpp"

#include <algorithm>
#include <numeric>

#include "report/svg_writer.hpp"

namespace stillmass::report {

namespace {

constexpr double pole_gap = 3.0;
constexpr double label_gap = 5.0;

struct Span {
  double from, to;
  bool contains(double x) const { return from < x && x < to; }
  bool overlaps(const Span& other) const { return from < other.to && other.from < to; }
};

Span span_of(const Flag& flag, double text_size) {
  const double width = text_width(flag.text, text_size) + pole_gap + label_gap;
  return flag.to_left ? Span{flag.at - width, flag.at} : Span{flag.at, flag.at + width};
}

bool texts_meet(const Flag& a, const Flag& b, double text_size) {
  return a.row == b.row && span_of(a, text_size).overlaps(span_of(b, text_size));
}

/// The pole of `a` stands from the panel up to the row of `a`.
bool pole_crosses(const Flag& a, const Flag& b, double text_size) {
  return a.row >= b.row && span_of(b, text_size).contains(a.at);
}

}  // namespace

std::vector<Flag> placed_flags(std::vector<Flag> flags, double width, double text_size) {
  std::stable_sort(flags.begin(), flags.end(), [](const Flag& a, const Flag& b) { return a.at < b.at; });
  for (Flag& flag : flags) flag.to_left = span_of(flag, text_size).to > width && flag.at > 0.5 * width;
  // A label must stand above the poles it reaches over: those to the right are placed from the right, then those to the
  // left from the left.
  std::vector<std::size_t> order;
  for (std::size_t i = flags.size(); i-- > 0;) {
    if (!flags[i].to_left) order.push_back(i);
  }
  for (std::size_t i = 0; i < flags.size(); ++i) {
    if (flags[i].to_left) order.push_back(i);
  }
  for (auto next = order.begin(); next != order.end(); ++next) {
    Flag& flag = flags[*next];
    const auto free = [&](int row, bool mind_poles) {
      flag.row = row;
      return std::none_of(order.begin(), next, [&](std::size_t placed) {
        const Flag& other = flags[placed];
        return texts_meet(flag, other, text_size) ||
               (mind_poles && (pole_crosses(flag, other, text_size) || pole_crosses(other, flag, text_size)));
      });
    };
    const int rows = static_cast<int>(flags.size());
    bool found = false;
    for (int row = 0; row <= rows && !found; ++row) found = free(row, true);
    for (int row = 0; row <= rows && !found; ++row) found = free(row, false);
  }
  return flags;
}

std::vector<double> spread(const std::vector<double>& wanted, double gap, double lo, double hi) {
  std::vector<std::size_t> order(wanted.size());
  std::iota(order.begin(), order.end(), std::size_t{0});
  std::stable_sort(order.begin(), order.end(), [&](std::size_t a, std::size_t b) { return wanted[a] < wanted[b]; });
  std::vector<double> places = wanted;
  double free_from = lo;
  for (const std::size_t i : order) {
    places[i] = std::max(wanted[i], free_from);
    free_from = places[i] + gap;
  }
  double free_to = hi;
  for (auto i = order.rbegin(); i != order.rend(); ++i) {
    places[*i] = std::min(places[*i], free_to);
    free_to = places[*i] - gap;
  }
  return places;
}

Box placed_beside(double x, double y, double width, double height, const Box& frame, const std::vector<Box>& taken) {
  constexpr double off = 7.0;
  const auto at = [&](double left, double top) { return Box{left, top, left + width, top + height}; };
  std::vector<Box> places{at(x - 0.5 * width, y - off - height),       at(x + off, y - 0.5 * height - off),
                          at(x - off - width, y - 0.5 * height - off), at(x + off, y - 0.5 * height),
                          at(x - off - width, y - 0.5 * height),       at(x - 0.5 * width, y + off)};
  for (int step = 1; step <= 4; ++step) {
    const double top = y - off - height - step * height;
    places.insert(places.end(), {at(x - 0.5 * width, top), at(x + off, top), at(x - off - width, top)});
  }
  for (const Box& place : places) {
    const bool inside = place.left >= frame.left && place.right <= frame.right && place.top >= frame.top &&
                        place.bottom <= frame.bottom;
    if (inside && std::none_of(taken.begin(), taken.end(), [&](const Box& b) { return b.overlaps(place); })) {
      return place;
    }
  }
  const Box& first = places.front();
  return at(std::clamp(first.left, frame.left, std::max(frame.left, frame.right - width)),
            std::clamp(first.top, frame.top, std::max(frame.top, frame.bottom - height)));
}

}  // namespace stillmass::report
