#include <algorithm>
#include <cmath>
#include <complex>
#include <map>
#include <numbers>
#include <optional>
#include <utility>

#include <fmt/format.h>

#include "stillmass/base/error.hpp"
#include "stillmass/spectral/deflection.hpp"

namespace stillmass::spectral {

namespace {

using Complex = std::complex<double>;

/// The frequency of several recordings, or nothing where two of them differ by more than the tolerance.
std::optional<base::Estimate> common_frequency(const std::vector<base::Estimate>& all, double tolerance) {
  const auto by_value = [](const base::Estimate& a, const base::Estimate& b) { return a.value < b.value; };
  const auto [lowest, highest] = std::minmax_element(all.begin(), all.end(), by_value);
  if (highest->value - lowest->value > tolerance * lowest->value) return std::nullopt;
  base::Estimate mean{0.0, 0.0, std::nullopt, base::Quantity::frequency};
  double greatest = 0.0;
  for (const base::Estimate& f : all) {
    mean.value += f.value / static_cast<double>(all.size());
    greatest = std::max(greatest, f.u.value_or(0.0));
  }
  mean.u = std::hypot(greatest, (highest->value - lowest->value) / std::sqrt(12.0));
  return mean;
}

base::Refusal frequencies_differ(const std::vector<base::Estimate>& all, double tolerance) {
  const auto by_value = [](const base::Estimate& a, const base::Estimate& b) { return a.value < b.value; };
  const auto [lowest, highest] = std::minmax_element(all.begin(), all.end(), by_value);
  return {"frequencies-differ",
          fmt::format("the recordings have the line from {:.5g} to {:.5g} Hz, more than {:.3g} % apart", lowest->value,
                      highest->value, 100.0 * tolerance),
          "record all points at one speed"};
}

/// Weighted mean of repeated measurements of one point.
Deflection mean_of(const std::vector<Deflection>& all, bool& disagree) {
  disagree = false;
  if (all.size() == 1) return all.front();
  const bool has_u =
      std::all_of(all.begin(), all.end(), [](const Deflection& d) { return d.magnitude.u && *d.magnitude.u > 0.0; });
  double weights = 0.0;
  Complex sum;
  for (const Deflection& d : all) {
    const double w = has_u ? 1.0 / (*d.magnitude.u * *d.magnitude.u) : 1.0;
    weights += w;
    sum += w * *d.ratio();
  }
  const Complex mean = sum / weights;
  Deflection result = all.front();
  result.magnitude = {std::abs(mean), std::nullopt, std::nullopt, base::Quantity::ratio};
  result.phase = base::Estimate{std::arg(mean), std::nullopt, std::nullopt, base::Quantity::angle};
  // Of one component: inner from the stated uncertainties, outer from the scatter about the mean.
  double outer = 0.0;
  for (const Deflection& d : all) {
    const double w = has_u ? 1.0 / (*d.magnitude.u * *d.magnitude.u) : 1.0;
    const double away = std::abs(*d.ratio() - mean);
    outer += 0.5 * w * away * away;
    if (has_u && away > 3.0 * std::numbers::sqrt2 * *d.magnitude.u) disagree = true;
    if (d.coherence) result.coherence = std::min(result.coherence.value_or(1.0), *d.coherence);
  }
  const auto repeats = static_cast<double>(all.size());
  outer /= (repeats - 1.0) * weights;
  const double variance = has_u ? std::max(outer, 1.0 / weights) : outer;
  result.magnitude.u = std::sqrt(variance);
  result.magnitude.dof = 2.0 * (repeats - 1.0);
  if (has_u && 1.0 / weights >= outer) result.magnitude.dof = std::nullopt;
  result.phase->u = result.magnitude.value > 0.0 ? *result.magnitude.u / result.magnitude.value : std::numbers::pi;
  result.phase->dof = result.magnitude.dof;
  return result;
}

}  // namespace

std::optional<Complex> Deflection::ratio() const {
  if (!phase) return std::nullopt;
  return std::polar(magnitude.value, phase->value);
}

DeflectionShape over_the_greatest(DeflectionShape shape) {
  if (!shape.sign_known || shape.points.empty()) return shape;
  const Deflection greatest =
      *std::max_element(shape.points.begin(), shape.points.end(),
                        [](const Deflection& a, const Deflection& b) { return a.magnitude.value < b.magnitude.value; });
  if (greatest.point == shape.reference || !greatest.phase) return shape;
  const double relative = greatest.magnitude.relative().value_or(0.0);
  for (Deflection& each : shape.points) {
    if (each.point == greatest.point) {
      each.magnitude = {1.0, {}, {}, base::Quantity::ratio};
      each.phase = base::Estimate{0.0, {}, {}, base::Quantity::angle};
      each.coherence.reset();
      continue;
    }
    const double own = each.magnitude.relative().value_or(0.0);
    each.magnitude.value /= greatest.magnitude.value;
    each.magnitude.u = std::hypot(own, relative) * each.magnitude.value;
    if (each.phase) {
      each.phase->value = std::remainder(each.phase->value - greatest.phase->value, 2.0 * std::numbers::pi);
      each.phase->u = std::hypot(each.phase->u.value_or(0.0), greatest.phase->u.value_or(0.0));
    }
    if (greatest.coherence) each.coherence = each.coherence.value_or(1.0) * *greatest.coherence;
  }
  shape.reference = greatest.point;
  return shape;
}

base::Answer<DeflectionShape> joined(std::span<const DeflectionShape> recordings, double tolerance) {
  if (recordings.empty()) throw base::usage_error({}, "no deflection to join", {});
  DeflectionShape shape;
  shape.asked_hz = recordings.front().asked_hz;
  shape.reference = recordings.front().reference;
  shape.recordings = 0;
  std::vector<base::Estimate> frequencies;
  for (const DeflectionShape& one : recordings) {
    if (one.reference != shape.reference || !one.sign_known) {
      return base::Refusal{"references-differ",
                           one.sign_known ? fmt::format("one recording has {} as its reference, another {}",
                                                        shape.reference, one.reference)
                                          : "one of the shapes has no reference",
                           "leave one sensor at the same point in every recording and name it as the reference"};
    }
    frequencies.push_back(one.frequency);
    shape.recordings += one.recordings;
    shape.levels_agree = shape.levels_agree && one.levels_agree;
  }
  const auto frequency = common_frequency(frequencies, tolerance);
  if (!frequency) return frequencies_differ(frequencies, tolerance);
  shape.frequency = *frequency;

  std::vector<std::string> order;
  std::map<std::string, std::vector<Deflection>> by_point;
  for (const DeflectionShape& one : recordings) {
    for (const Deflection& d : one.points) {
      if (!by_point.contains(d.point)) order.push_back(d.point);
      if (d.point == shape.reference && by_point.contains(d.point)) continue;
      by_point[d.point].push_back(d);
    }
  }
  for (const std::string& point : order) {
    bool disagree = false;
    shape.points.push_back(mean_of(by_point[point], disagree));
    if (disagree) shape.disagreeing.push_back(point);
  }
  for (const DeflectionShape& one : recordings) {
    for (const PointRefusal& p : one.not_given) {
      if (!by_point.contains(p.point)) shape.not_given.push_back(p);
    }
    for (const std::string& point : one.disagreeing) {
      if (std::find(shape.disagreeing.begin(), shape.disagreeing.end(), point) == shape.disagreeing.end()) {
        shape.disagreeing.push_back(point);
      }
    }
  }
  return shape;
}

base::Answer<DeflectionShape> magnitudes_only(std::span<const RovedLevel> levels, double tolerance) {
  if (levels.size() < 2) throw base::usage_error({}, "a shape of fewer than two points", {});
  std::size_t greatest = 0;
  std::vector<base::Estimate> frequencies;
  for (std::size_t i = 0; i < levels.size(); ++i) {
    if (levels[i].amplitude_rms.quantity != levels[0].amplitude_rms.quantity) {
      throw base::usage_error({}, "levels of different quantities in one shape", "bring them to one quantity");
    }
    if (levels[i].amplitude_rms.value > levels[greatest].amplitude_rms.value) greatest = i;
    frequencies.push_back(levels[i].frequency);
  }
  const auto frequency = common_frequency(frequencies, tolerance);
  if (!frequency) return frequencies_differ(frequencies, tolerance);
  const base::Estimate& most = levels[greatest].amplitude_rms;
  if (!(most.value > 0.0)) throw base::usage_error({}, "a shape of points that do not move", {});
  DeflectionShape shape;
  shape.asked_hz = frequency->value;
  shape.frequency = *frequency;
  shape.reference = levels[greatest].point;
  shape.sign_known = false;
  shape.levels_agree = false;
  shape.recordings = levels.size();
  for (std::size_t i = 0; i < levels.size(); ++i) {
    const base::Estimate& level = levels[i].amplitude_rms;
    Deflection d;
    d.point = levels[i].point;
    d.magnitude = {level.value / most.value, std::nullopt, std::nullopt, base::Quantity::ratio};
    if (i == greatest) {
      d.magnitude.u = 0.0;
    } else if (level.u && most.u) {
      d.magnitude.u = std::hypot(*level.u, d.magnitude.value * *most.u) / most.value;
    }
    shape.points.push_back(std::move(d));
  }
  return shape;
}

}  // namespace stillmass::spectral
