#pragma once

#include <algorithm>
#include <cmath>

#include "stillmass/base/interval.hpp"
#include "stillmass/report/chart.hpp"

namespace stillmass::report {

/// From a value on an axis to a place in a drawing.
class Ruler {
 public:
  /// `range.lo` comes to stand at `from`, `range.hi` at `to`.
  Ruler(Scale scale, base::Interval range, double from, double to)
      : scale_(scale), range_(range), lo_(value(range.lo)), hi_(value(range.hi)), from_(from), to_(to) {}

  /// A logarithmic scale has no place for values <= 0.
  bool has(double v) const { return scale_ == Scale::linear || v > 0.0; }
  bool shows(double v) const { return range_.contains(v); }
  /// Far outside the drawing all places are alike: keeps the numbers of a path short.
  double operator()(double v) const {
    return std::clamp(from_ + (value(v) - lo_) / (hi_ - lo_) * (to_ - from_), -9999.0, 9999.0);
  }
  const base::Interval& range() const { return range_; }
  /// The foot of bars and stems: zero, or the end of the scale that is nearest to it.
  double foot() const { return (*this)(scale_ == Scale::logarithmic ? range_.lo : range_.clamped(0.0)); }

 private:
  double value(double v) const { return scale_ == Scale::logarithmic ? std::log10(v) : v; }

  Scale scale_;
  base::Interval range_;
  double lo_, hi_, from_, to_;
};

}  // namespace stillmass::report
