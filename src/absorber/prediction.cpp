#include "stillmass/absorber/prediction.hpp"

#include <algorithm>
#include <cmath>
#include <numbers>

#include "stillmass/base/error.hpp"

#include "absorber/composition.hpp"
#include "absorber/response.hpp"

namespace stillmass::absorber {
namespace {

enum Drawn : std::size_t { frequency, damping, mass, tuning, damper, temperature, velocity, count };

/// What one absorber leaves on one machine.
struct CaseResult {
  double after = 0.0;
  double line_after = 0.0;
  double at_duty = 0.0;
  double travel = 0.0;
  double clearance = 0.0;
};

numeric::Cases cases_of(const PredictionInput& input, double velocity_u) {
  using numeric::Distribution;
  const auto& mode = input.mode;
  const auto& allowances = input.allowances;
  const auto estimated = [](const char* name, const base::Estimate& estimate, double relative) {
    return numeric::input_of(name, estimate, Distribution::lognormal, relative * estimate.value);
  };
  const auto factor = [](const char* name, double u) { return numeric::Input{name, 1.0, u, Distribution::lognormal}; };

  std::vector<numeric::Input> inputs(Drawn::count);
  inputs[frequency] = estimated("natural frequency", mode.frequency, allowances.mode_frequency_u);
  inputs[damping] = estimated("damping ratio", mode.damping_ratio, allowances.mode_damping_u);
  inputs[mass] = estimated("modal mass", *mode.modal_mass, allowances.modal_mass_u);
  inputs[tuning] = factor("tuning of the absorber", allowances.tuning_u);
  inputs[damper] = factor("damping of the absorber", input.damped ? allowances.damper_u : allowances.own_damping_u);
  inputs[temperature] = numeric::rectangular_input(
      "temperature", allowances.temperature_c.value_or(base::Interval{allowances.tuned_at_c, allowances.tuned_at_c}));
  inputs[velocity] = factor("velocity before", velocity_u);

  std::vector<double> correlation(Drawn::count * Drawn::count, 0.0);
  for (std::size_t i = 0; i < Drawn::count; ++i) {
    for (std::size_t j = 0; j < Drawn::count; ++j) {
      const bool of_mode = i <= mass && j <= mass;
      correlation[i * Drawn::count + j] = of_mode ? mode.correlation[i][j] : (i == j ? 1.0 : 0.0);
    }
  }
  return {std::move(inputs), correlation, input.seed};
}

void check(const PredictionInput& input) {
  if (!input.mode.modal_mass) throw base::usage_error("mode", "has no modal mass");
  const auto& range = input.forcing.range_hz;
  if (!(range.lo > 0.0 && range.lo <= range.hi) || !std::isfinite(range.hi) || !(input.forcing.duty() > 0.0)) {
    throw base::usage_error("forcing frequency", "must be a range of positive frequencies");
  }
  if (input.cases < 2) throw base::usage_error("cases", "must be at least 2");
}

double distance(base::Interval range, double f) {
  if (f < range.lo) return 1.0 - f / range.lo;
  return f > range.hi ? f / range.hi - 1.0 : 0.0;
}

}  // namespace

struct Prediction::State {
  State(const PredictionInput& from, const base::Context& context)
      : input(from),
        parts(compose(from.before, from.forcing, from.mode.frequency.value, from.allowances.velocity_u)),
        cases(cases_of(from, parts.relative_u)),
        draws(numeric::draw_all(cases, from.cases, context)) {
    constexpr int steps = 32;
    const base::Interval range = input.forcing.range_hz;
    for (int i = 0; i <= steps; ++i) line_hz.push_back(range.lo + range.width() * i / steps);
    if (range.width() == 0.0) line_hz.resize(1);
  }

  CaseResult result(const modal::SprungMass& absorber, std::size_t n) const;
  std::vector<CaseResult> results(const modal::SprungMass& absorber, const base::Context& context) const;

  PredictionInput input;
  Composition parts;
  numeric::Cases cases;
  std::vector<double> draws;
  std::vector<double> line_hz;  // where the forcing line is looked at
};

CaseResult Prediction::State::result(const modal::SprungMass& absorber, std::size_t n) const {
  const double* drawn = &draws[n * Drawn::count];
  const auto& allowances = input.allowances;
  const base::Interval temperatures =
      allowances.temperature_c.value_or(base::Interval{allowances.tuned_at_c, allowances.tuned_at_c});
  const double warmer = drawn[temperature] - temperatures.clamped(allowances.tuned_at_c);
  const double built_hz = absorber.frequency_hz * drawn[tuning] * std::sqrt(1.0 + allowances.modulus_per_k * warmer);
  const double built_damping =
      absorber.damping_ratio * drawn[damper] * (input.damped ? std::exp(allowances.damper_per_k * warmer) : 1.0);
  const double f1 = drawn[frequency];
  const double z1 = drawn[damping];
  const Coupled pair(absorber.mass_kg / drawn[mass], z1, built_hz / f1, built_damping);
  const Forcing forcing = input.forcing.forcing;
  const double w1 = 2.0 * std::numbers::pi * f1;

  // The forcing line: velocity^2 at f over velocity^2 before at the duty frequency.
  const auto squared = [&](double f) { return (f / f1) * (f / f1); };
  const double before = bare_velocity(z1, forcing, squared(input.forcing.duty()));
  double line = 0.0;
  double line_travel = 0.0;  // mean square, m^2
  const auto look = [&](double s) {
    const double force = parts.line * velocity_weight(z1, forcing, s) / before;
    line = std::max(line, force * pair.displacement(s));
    line_travel = std::max(line_travel, force * pair.travel(s) / (s * w1 * w1));
  };
  CaseResult result;
  result.clearance = 1.0;
  for (const double split : pair.splits()) {
    const double f = f1 * std::sqrt(split);
    result.clearance = std::min(result.clearance, distance(input.forcing.range_hz, f));
    if (parts.line > 0.0 && input.forcing.range_hz.contains(f)) look(split);
  }
  double line_at_duty = 0.0;
  if (parts.line > 0.0) {
    for (const double f : line_hz) look(squared(f));
    line_at_duty = parts.line * pair.ratio(squared(input.forcing.duty()));
  }

  // The rest of the mode's response.
  double noise = 0.0;
  double noise_travel = 0.0;  // mean square, m^2
  for (const Portion& portion : parts.noise) {
    const double s = squared(portion.frequency_hz);
    const double bare = pair.bare(s);
    noise += portion.mean_square * pair.ratio(s);
    noise_travel += portion.mean_square * bare * pair.travel(s) / (s * w1 * w1);
  }
  if (parts.white > 0.0) {
    const WhiteResponse with = white_response(pair);
    const WhiteResponse without = white_response(z1);
    noise += parts.white * with.velocity / without.velocity;
    noise_travel += parts.white * with.travel / (without.velocity * w1 * w1);
  }

  const double scale = drawn[velocity];
  const double still = noise + parts.outside;
  result.after = scale * std::sqrt(line + still);
  result.line_after = scale * std::sqrt(line);
  result.at_duty = scale * std::sqrt(line_at_duty + still);
  result.travel = scale * (std::sqrt(2.0 * line_travel) + 3.0 * std::sqrt(noise_travel));
  return result;
}

std::vector<CaseResult> Prediction::State::results(const modal::SprungMass& absorber,
                                                   const base::Context& context) const {
  std::vector<CaseResult> all;
  all.reserve(input.cases);
  base::for_ranges(
      context, input.cases, 64,
      [&](std::size_t begin, std::size_t end) {
        std::vector<CaseResult> part;
        for (std::size_t n = begin; n < end; ++n) part.push_back(result(absorber, n));
        return part;
      },
      [&](const std::vector<CaseResult>& part) { all.insert(all.end(), part.begin(), part.end()); });
  return all;
}

namespace {

numeric::Outcome outcome(const std::vector<CaseResult>& results, double CaseResult::*what) {
  std::vector<double> values;
  values.reserve(results.size());
  for (const CaseResult& result : results) values.push_back(result.*what);
  return numeric::Outcome(std::move(values));
}

base::Estimate median_estimate(const numeric::Outcome& outcome, base::Quantity quantity) {
  return {outcome.median(), outcome.u(), {}, quantity};
}

}  // namespace

Prediction::Prediction(const PredictionInput& input, const base::Context& context) {
  check(input);
  state_ = std::make_unique<const State>(input, context);
}
Prediction::~Prediction() = default;
Prediction::Prediction(Prediction&&) noexcept = default;

Predicted Prediction::of(const modal::SprungMass& absorber, std::optional<double> target,
                         const base::Context& context) const {
  const auto results = state_->results(absorber, context);
  const auto after = outcome(results, &CaseResult::after);
  const auto travel = outcome(results, &CaseResult::travel);
  Predicted predicted;
  predicted.point = state_->input.before.point;
  predicted.band_hz = state_->input.before.band_hz;
  predicted.before = before();
  predicted.after = median_estimate(after, base::Quantity::velocity);
  predicted.at_duty = median_estimate(outcome(results, &CaseResult::at_duty), base::Quantity::velocity);
  predicted.component_before = component_before();
  if (predicted.component_before) {
    predicted.component_after = median_estimate(outcome(results, &CaseResult::line_after), base::Quantity::velocity);
  }
  predicted.worst_case = after.quantile(0.95);
  if (target) predicted.probability_meets_target = after.fraction_up_to(*target);
  predicted.outside_model = outside_model();
  predicted.travel_m = median_estimate(travel, base::Quantity::displacement);
  predicted.travel_worst_m = travel.quantile(0.95);
  predicted.split_clearance = outcome(results, &CaseResult::clearance).quantile(0.05);
  return predicted;
}

double Prediction::quantile(const modal::SprungMass& absorber, double probability, const base::Context& context) const {
  return outcome(state_->results(absorber, context), &CaseResult::after).quantile(probability);
}

std::vector<numeric::Driver> Prediction::drivers(const modal::SprungMass& absorber,
                                                 const base::Context& context) const {
  std::vector<double> after;
  for (const CaseResult& result : state_->results(absorber, context)) after.push_back(result.after);
  return numeric::drivers(state_->cases, state_->draws, after);
}

double Prediction::outside_model() const { return std::sqrt(state_->parts.outside); }

base::Estimate Prediction::before() const {
  if (state_->input.before.overall) return *state_->input.before.overall;
  if (!state_->input.before.spectrum && state_->input.before.component) return *state_->input.before.component;
  const auto& parts = state_->parts;
  return {parts.overall, parts.overall * parts.relative_u, {}, base::Quantity::velocity};
}

std::optional<base::Estimate> Prediction::component_before() const {
  const auto& parts = state_->parts;
  if (!(parts.line > 0.0)) return {};
  if (state_->input.before.component) return *state_->input.before.component;
  const double line = std::sqrt(parts.line);
  return base::Estimate{line, line * parts.relative_u, {}, base::Quantity::velocity};
}

}  // namespace stillmass::absorber
