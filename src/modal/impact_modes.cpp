#include "modal/impact_modes.hpp"

#include <algorithm>
#include <cmath>
#include <optional>
#include <string>

#include "stillmass/base/number.hpp"
#include "stillmass/base/parallel.hpp"
#include "stillmass/modal/half_power.hpp"
#include "stillmass/modal/headline.hpp"
#include "stillmass/modal/shape.hpp"

namespace stillmass::modal {
namespace {

using Complex = std::complex<double>;

/// What all hits, or all but one, say of one mode.
struct Reading {
  FrequencyAndDamping fit;
  double mass = 0.0;  ///< 1 / |strength| at the first response of the fit
  std::optional<FrequencyAndDamping> half_power;
};
using Readings = std::vector<Reading>;  // one a mode

/// The stretch that belongs to one mode: half way to its neighbours.
base::Interval own_band(const CurveFit& fit, std::size_t r) {
  const double f = fit.modes[r].system.frequency_hz;
  const double below = r > 0 ? fit.modes[r - 1].system.frequency_hz : 0.0;
  const double above = r + 1 < fit.modes.size() ? fit.modes[r + 1].system.frequency_hz : 2.0 * f;
  return {0.5 * (below + f), 0.5 * (f + above)};
}

/// What was measured less what the fit ascribes to all but one mode.
std::vector<double> magnitude_alone(const HitSpectra& spectra, const CurveFit& fit, std::size_t mode,
                                    base::Interval band_hz, const std::vector<Complex>& measured) {
  CurveFit others = fit;
  others.modes.erase(others.modes.begin() + static_cast<std::ptrdiff_t>(mode));
  std::vector<double> magnitude(measured.size(), 0.0);
  for (std::size_t k = 0; k < measured.size(); ++k) {
    if (!band_hz.contains(spectra.line_hz * static_cast<double>(k))) continue;
    magnitude[k] = std::abs(measured[k] - others.accelerance(0, spectra.s(k)));
  }
  return magnitude;
}

Readings read(const Fitted& fitted, const CurveFit& fit, const std::vector<Complex>& first_response) {
  const HitSpectra& spectra = fitted.spectra;
  Readings readings;
  for (std::size_t r = 0; r < fit.modes.size(); ++r) {
    Reading reading{fit.modes[r].system, fit.modes[r].mass_kg(), {}};
    const base::Interval band = own_band(fit, r);
    const std::vector<double> magnitude = magnitude_alone(spectra, fit, r, band, first_response);
    const auto half = half_power(magnitude, spectra.line_hz, band, ResponseKind::accelerance, spectra.decay_per_s);
    if (half && half->system.damping_ratio > 0.0) reading.half_power = half->system;
    readings.push_back(reading);
  }
  return readings;
}

/// The readings without each hit in turn; empty where there is only one hit or a fit without one of them fails.
std::vector<Readings> leave_one_out(const Fitted& fitted, const base::Context& context) {
  const std::size_t hits = fitted.spectra.hits();
  std::vector<FrequencyAndDamping> start;
  for (const FittedMode& mode : fitted.fit.modes) start.push_back(mode.system);
  std::vector<Readings> without;
  bool complete = hits > 1;
  if (!complete) return {};

  const auto work = [&](std::size_t hit, std::size_t) {
    std::vector<std::vector<Complex>> accelerances;
    for (const std::size_t p : fitted.order) accelerances.push_back(accelerance_without(fitted.spectra, p, hit));
    const FitLines lines = with_accelerances(fitted.lines, fitted.spectra, accelerances);
    const auto fit = curve_fit(lines.frequency_hz, lines.measured(), start, lines.decay_per_s);
    const bool settled = fit && std::ranges::all_of(fit->modes, &FittedMode::settled);
    return settled ? std::optional(read(fitted, *fit, accelerances.front())) : std::nullopt;
  };
  base::for_ranges(context, hits, 1, work, [&](std::optional<Readings> readings) {
    complete = complete && readings.has_value();
    if (readings) without.push_back(std::move(*readings));
    context.report("fitting modes", static_cast<double>(without.size()) / static_cast<double>(hits));
  });
  if (!complete) without.clear();
  return without;
}

template <class Get>
base::Estimate over_hits(double all, const std::vector<Readings>& without, std::size_t mode, base::Quantity quantity,
                         Get get) {
  std::vector<double> values;
  for (const Readings& readings : without) values.push_back(get(readings[mode]));
  return jackknifed(all, values, quantity);
}

/// Scatter over hits or about the fit; nothing at all is known from a single hit.
base::Estimate with_scatter(const base::Estimate& hits, double fit_u, const Fitted& fitted) {
  if (fitted.spectra.hits() < 2) return hits;
  return wider(hits, {hits.value, fit_u, fitted.fit.dof, hits.quantity});
}

std::optional<MethodResult> half_power_result(const Readings& all, const std::vector<Readings>& without,
                                              std::size_t r) {
  if (!all[r].half_power) return std::nullopt;
  MethodResult result{"half-power bandwidth",
                      {all[r].half_power->frequency_hz, {}, {}, base::Quantity::frequency},
                      {all[r].half_power->damping_ratio, {}, {}, base::Quantity::ratio}};
  const bool everywhere =
      std::ranges::all_of(without, [&](const Readings& readings) { return readings[r].half_power.has_value(); });
  if (!everywhere) return result;
  result.frequency = over_hits(result.frequency.value, without, r, base::Quantity::frequency,
                               [](const Reading& reading) { return reading.half_power->frequency_hz; });
  result.damping_ratio = over_hits(result.damping_ratio.value, without, r, base::Quantity::ratio,
                                   [](const Reading& reading) { return reading.half_power->damping_ratio; });
  return result;
}

double calibration_u(const ImpactTestOptions& options, std::size_t response) {
  const double of_response =
      response < options.responses.size() ? options.responses[response].factor_u.value_or(0.0) : 0.0;
  return std::hypot(options.force_factor_u.value_or(0.0), of_response);
}

std::string name_of(const ImpactTestOptions& options, std::size_t response) {
  if (response >= options.responses.size()) return "response " + std::to_string(response + 1);
  const ResponseName& name = options.responses[response];
  return name.point.empty() ? name.channel : name.point;
}

/// The response that a mode is told of: the driving point, or else where it moves most.
std::size_t reference_of(const FittedMode& mode, bool driving_point_first) {
  if (driving_point_first) return 0;
  const auto most = std::ranges::max_element(mode.strength, {}, [](Complex c) { return std::abs(c); });
  return static_cast<std::size_t>(most - mode.strength.begin());
}

}  // namespace

std::vector<Mode> modes_with_uncertainty(const Fitted& fitted, const ImpactTestOptions& options, ImpactTest& test,
                                         const base::Context& context) {
  const CurveFit& fit = fitted.fit;
  const Readings all = read(fitted, fit, fitted.averages.front().accelerance);
  const std::vector<Readings> without = leave_one_out(fitted, context);
  const double sign = driving_sign(fit);
  std::vector<std::string> points;
  for (const std::size_t p : fitted.order) points.push_back(name_of(options, p));

  std::vector<Mode> modes;
  for (std::size_t r = 0; r < fit.modes.size(); ++r) {
    const FittedMode& one = fit.modes[r];
    Mode mode;
    mode.state = options.state;
    mode.correlation = one.correlation;
    mode.frequency = with_scatter(over_hits(one.system.frequency_hz, without, r, base::Quantity::frequency,
                                            [](const Reading& reading) { return reading.fit.frequency_hz; }),
                                  one.frequency_u, fitted);
    mode.damping_ratio = with_scatter(over_hits(one.system.damping_ratio, without, r, base::Quantity::ratio,
                                                [](const Reading& reading) { return reading.fit.damping_ratio; }),
                                      one.damping_u, fitted);
    const std::size_t reference = reference_of(one, test.driving_point.has_value());
    mode.point = points[reference];
    mode.shape = shape_ratios(points, one.strength, reference);
    const bool with_the_others = sign * one.strength.front().real() > 0.0;
    if (test.driving_point && !with_the_others) {
      test.findings.push_back(
          {base::Code::outside_model,
           "at " + points.front() + " the mode at " + base::rounded(one.system.frequency_hz, 4) +
               " Hz moves against the blow where the others move with it: the blow did not fall on that "
               "point in that direction, and there is no modal mass",
           {},
           {},
           {},
           base::Strength::strong,
           {}});
    }
    if (test.driving_point && with_the_others) {
      const double mass = one.mass_kg();
      base::Estimate estimate = with_scatter(
          over_hits(mass, without, r, base::Quantity::mass, [](const Reading& reading) { return reading.mass; }),
          mass * mass * one.strength_u.front(), fitted);
      const double before = estimate.u.value_or(0.0);
      estimate = with_added_u(estimate, mass * calibration_u(options, *test.driving_point));
      const double share = estimate.u && *estimate.u > 0.0 ? before / *estimate.u : 1.0;
      for (std::size_t i = 0; i < 2; ++i) {
        mode.correlation[i][2] *= share;
        mode.correlation[2][i] *= share;
      }
      mode.modal_mass = estimate;
    }
    mode.methods.push_back({"curve fit", mode.frequency, mode.damping_ratio});
    if (auto half = half_power_result(all, without, r)) mode.methods.push_back(std::move(*half));
    if (auto finding = disagreement(mode.methods)) test.findings.push_back(std::move(*finding));
    modes.push_back(std::move(mode));
  }
  return modes;
}

}  // namespace stillmass::modal
