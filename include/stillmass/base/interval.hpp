#pragma once

namespace stillmass::base {

/// Closed interval LO:HI, lo <= hi.
struct Interval {
  double lo = 0.0;
  double hi = 0.0;

  double width() const { return hi - lo; }
  double middle() const { return 0.5 * (lo + hi); }
  bool contains(double x) const { return lo <= x && x <= hi; }
  bool intersects(const Interval& other) const { return lo <= other.hi && other.lo <= hi; }
  double clamped(double x) const { return x < lo ? lo : (x > hi ? hi : x); }
  bool operator==(const Interval&) const = default;
};

}  // namespace stillmass::base
