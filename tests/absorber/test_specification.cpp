#include <cmath>
#include <numbers>

#include "stillmass/absorber/specification.hpp"
#include "stillmass/base/error.hpp"

#include "absorber/situations.hpp"
#include "support/catch.hpp"

using namespace stillmass::absorber;
namespace base = stillmass::base;
namespace tests = stillmass::tests;

namespace {

Specification answer(const Request& request, const base::Context& context = {}) {
  const auto specification = specify(request, context);
  REQUIRE(specification);
  return *specification;
}

bool noted(const Specification& specification, ReasonCode code) {
  for (const auto& note : specification.notes) {
    if (note.code == code) return true;
  }
  return false;
}

}  // namespace

TEST_CASE("a line-fed pump near a mode gets an undamped absorber that meets the target") {
  const auto request = tests::pump_request();
  const auto spec = answer(request);
  CHECK(spec.recommendation == Recommendation::undamped);
  CHECK(spec.reason.code == ReasonCode::one_forcing_frequency);
  CHECK(spec.notes.empty());
  REQUIRE(spec.absorber);
  const auto& absorber = *spec.absorber;
  CHECK(absorber.mass_kg <= 15.0);
  CHECK(absorber.frequency_hz == Approx(24.635).epsilon(1e-12));
  // Mass, frequency, stiffness and damping agree.
  const double w = 2.0 * std::numbers::pi * absorber.frequency_hz;
  CHECK(absorber.stiffness == Approx(absorber.mass_kg * w * w).epsilon(1e-12));
  CHECK(absorber.damping_constant == Approx(2.0 * absorber.damping_ratio * absorber.mass_kg * w).epsilon(1e-12));
  CHECK(absorber.mass_ratio == Approx(absorber.mass_kg / 280.0).epsilon(1e-12));
  // The splits keep the margin from the forcing range.
  CHECK(absorber.split_frequencies_hz[0] < 0.95 * 24.57);
  CHECK(absorber.split_frequencies_hz[1] > 1.05 * 24.70);

  REQUIRE(spec.predicted);
  CHECK(*spec.predicted->probability_meets_target >= 0.95);
  CHECK(spec.predicted->worst_case <= 2.8e-3);
  CHECK(spec.predicted->travel_worst_m <= 4e-3);
  CHECK(spec.predicted->point == "pump-de-h");
  CHECK(spec.blades.size() >= 1);
  CHECK(spec.springs.size() >= 1);
  CHECK(spec.tuning.size() >= 3);
  CHECK(spec.passing);
  CHECK(spec.remedies.size() == 7);
  CHECK_FALSE(spec.drivers.empty());
  CHECK_FALSE(spec.damper);
}

TEST_CASE("the lightest absorber is chosen: one noticeably lighter does not do") {
  auto request = tests::pump_request();
  const auto spec = answer(request);
  request.constraints.max_mass_kg = 0.9 * spec.absorber->mass_kg;
  const auto lighter = answer(request);
  CHECK((lighter.recommendation != Recommendation::undamped || noted(lighter, ReasonCode::split_near_forcing) ||
         noted(lighter, ReasonCode::target_not_certain)));
}

TEST_CASE("a variable speed across the mode gets a damped absorber") {
  auto request = tests::pump_request();
  request.forcing.range_hz = {20.0, 28.0};
  request.constraints.max_mass_kg = 60.0;
  const auto spec = answer(request);
  CHECK(spec.recommendation == Recommendation::damped);
  CHECK(spec.reason.code == ReasonCode::forcing_band);
  REQUIRE(spec.absorber);
  CHECK(spec.absorber->damping_ratio > 0.05);
  CHECK(spec.absorber->mass_kg < 60.0);
  CHECK(*spec.predicted->probability_meets_target >= 0.95);
  REQUIRE(spec.damper);
  CHECK(spec.damper->damping_constant == Approx(spec.absorber->damping_constant).epsilon(1e-12));
}

TEST_CASE("where the target cannot be reached with certainty the greatest mass is taken, and said so") {
  auto request = tests::pump_request();
  request.forcing.range_hz = {20.0, 28.0};
  const auto spec = answer(request);
  CHECK(spec.recommendation == Recommendation::damped);
  CHECK(spec.absorber->mass_kg == 15.0);
  CHECK(noted(spec, ReasonCode::target_not_certain));
  CHECK(*spec.predicted->probability_meets_target < 0.95);
}

TEST_CASE("settling a damped absorber on the cases is never worse than the nominal optimum") {
  auto request = tests::pump_request();
  request.forcing.range_hz = {20.0, 28.0};
  const auto settled = answer(request);
  request.objective = Objective::displacement;  // not settled: the textbook's optimum
  const auto textbook = answer(request);
  CHECK(settled.predicted->worst_case <= textbook.predicted->worst_case);
}

TEST_CASE("a random force gets a damped absorber near the optimum for white noise") {
  auto request = tests::pump_request();
  request.forcing.forcing = Forcing::random;
  const auto spec = answer(request);
  CHECK(spec.recommendation == Recommendation::damped);
  CHECK(spec.reason.code == ReasonCode::random_forcing);
  CHECK(spec.absorber->frequency_hz == Approx(23.8 / std::sqrt(1.0 + spec.absorber->mass_ratio)).epsilon(0.02));
  CHECK_FALSE(spec.passing);
  CHECK(spec.remedies.empty());
}

TEST_CASE("nothing is recommended where it cannot help, and the reason is given") {
  auto request = tests::pump_request();
  SECTION("the target is met already") {
    request.constraints.target = 8e-3;
    CHECK(answer(request).reason.code == ReasonCode::target_already_met);
  }
  SECTION("other lines and modes alone exceed the target") {
    request.before.overall = tests::estimate(8e-3, 8e-5, base::Quantity::velocity);
    const auto spec = answer(request);
    CHECK(spec.reason.code == ReasonCode::outside_model_exceeds_target);
    CHECK(spec.predicted->outside_model == Approx(std::sqrt(64e-6 - 49e-6)).epsilon(1e-9));
  }
  SECTION("the mass allowed is too small") {
    request.constraints.max_mass_kg = 0.5;
    request.forcing.range_hz = {20.0, 28.0};
    CHECK(answer(request).reason.code == ReasonCode::mass_too_small);
  }
  SECTION("the travel would be too long") {
    request.constraints.max_travel_m = 1e-6;
    CHECK(answer(request).reason.code == ReasonCode::travel_exceeds_limit);
  }
  const auto spec = answer(request);
  CHECK(spec.recommendation == Recommendation::none);
  CHECK_FALSE(spec.absorber);
  CHECK(spec.best_possible);
  CHECK(spec.predicted);
  CHECK(spec.blades.empty());
  CHECK_FALSE(spec.reason.numbers.empty());
}

TEST_CASE("without a measurement before, the kind follows from the forcing range") {
  auto request = tests::pump_request();
  request.before = {};
  const auto narrow = answer(request);
  CHECK(narrow.recommendation == Recommendation::undamped);
  CHECK(narrow.absorber->mass_kg == 15.0);
  CHECK_FALSE(narrow.predicted);
  CHECK(noted(narrow, ReasonCode::no_target));
  request.forcing.range_hz = {20.0, 28.0};
  CHECK(answer(request).recommendation == Recommendation::damped);
}

TEST_CASE("for an undamped machine and the textbook's objective the sizing is the textbook's") {
  // A closed form through the whole chain: CHECKS.md A4, mu 0.05, wide band, constant force.
  auto request = tests::pump_request();
  request.mode = tests::sure_mode();
  request.mode.damping_ratio.value = 1e-7;
  request.before = {};
  request.objective = Objective::displacement;
  request.forcing = {Forcing::constant, {10.0, 40.0}, {}};
  request.constraints.max_mass_kg = 14.0;
  const auto spec = answer(request);
  CHECK(spec.absorber->frequency_hz / 23.8 == Approx(0.952372).epsilon(1e-5));
  CHECK(spec.absorber->damping_ratio == Approx(0.133938).epsilon(1e-4));
}

TEST_CASE("a mode without a modal mass is refused with what to measure") {
  auto request = tests::pump_request();
  request.mode.modal_mass.reset();
  const auto refused = specify(request, {});
  REQUIRE_FALSE(refused);
  CHECK(refused.refusal().code == "modal-mass-unknown");
  CHECK_FALSE(refused.refusal().measure.empty());
}

TEST_CASE("unknown uncertainties, mass bound and temperature are noted as assumed") {
  auto request = tests::pump_request();
  request.mode.frequency.u.reset();
  request.constraints.max_mass_kg.reset();
  request.allowances.temperature_c.reset();
  const auto spec = answer(request);
  CHECK(noted(spec, ReasonCode::mode_uncertainty_assumed));
  CHECK(noted(spec, ReasonCode::mass_bound_assumed));
  CHECK(noted(spec, ReasonCode::temperature_unknown));
}

TEST_CASE("other points are predicted beside the one that is judged") {
  auto request = tests::pump_request();
  request.others = {tests::line_only(3.5e-3), {}};
  request.others.front().point = "motor-nde-h";
  const auto spec = answer(request);
  REQUIRE(spec.others.size() == 1);  // nothing was measured at the second
  CHECK(spec.others.front().point == "motor-nde-h");
  CHECK(spec.others.front().after.value == Approx(0.5 * spec.predicted->after.value).epsilon(1e-9));
}

TEST_CASE("the specification is the same bits on one thread and on many") {
  const auto request = tests::pump_request();
  base::Context many;
  many.threads = 4;
  const auto one = answer(request);
  const auto four = answer(request, many);
  CHECK(one.absorber->mass_kg == four.absorber->mass_kg);
  CHECK(one.predicted->after.value == four.predicted->after.value);
  CHECK(one.predicted->worst_case == four.predicted->worst_case);
  CHECK(one.drivers.front().share == four.drivers.front().share);
}

TEST_CASE("a stop request is obeyed") {
  std::stop_source source;
  source.request_stop();
  base::Context context;
  context.stop = source.get_token();
  CHECK_THROWS_AS(specify(tests::pump_request(), context), base::Stopped);
}

TEST_CASE("impossible constraints are wrong calls") {
  auto request = tests::pump_request();
  request.constraints.target = -1.0;
  CHECK_THROWS_AS(specify(request, {}), base::Error);
  request = tests::pump_request();
  request.constraints.max_mass_kg = std::nan("");
  CHECK_THROWS_AS(specify(request, {}), base::Error);
}
