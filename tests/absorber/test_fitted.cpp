#include <cmath>

#include "stillmass/absorber/fitted.hpp"
#include "stillmass/absorber/remedies.hpp"
#include "stillmass/base/error.hpp"

#include "absorber/situations.hpp"
#include "oracle/two_mass.hpp"
#include "support/catch.hpp"

using namespace stillmass::absorber;
namespace base = stillmass::base;
namespace modal = stillmass::modal;
namespace oracle = stillmass::oracle;
namespace tests = stillmass::tests;

namespace {

constexpr modal::OneMode machine{23.8, 0.009, 280.0};

double velocity(const modal::OneMode& mode, double f) { return f * std::abs(mode.receptance(f)); }

const Remedy& of_kind(const std::vector<Remedy>& all, RemedyKind kind) {
  for (const auto& remedy : all) {
    if (remedy.kind == kind) return remedy;
  }
  throw std::runtime_error("no such remedy");
}

}  // namespace

TEST_CASE("amplitude and phase before and after tell what was really fitted") {
  for (const modal::SprungMass actual : {modal::SprungMass{10.0, 24.1, 0.006}, modal::SprungMass{10.0, 25.2, 0.05}}) {
    const auto pair = oracle::two_mass(280.0, 23.8, 0.009, 10.0, actual.frequency_hz, actual.damping_ratio);
    const auto ratio = oracle::under_force(pair, 1.0, 24.633).machine / oracle::machine_alone(pair, 1.0, 24.633);
    const auto fitted = fitted_from_line(machine, 10.0, 24.633, ratio, 24.635);
    REQUIRE(fitted);
    CHECK(fitted->frequency_hz == Approx(actual.frequency_hz).epsilon(1e-9));
    CHECK(*fitted->damping_ratio == Approx(actual.damping_ratio).epsilon(1e-7));
    CHECK(fitted->retune == Approx(24.635 / actual.frequency_hz - 1.0).epsilon(1e-7));
  }
}

TEST_CASE("a line that did not change, or that no spring explains, is refused") {
  const auto unchanged = fitted_from_line(machine, 10.0, 24.633, {1.005, 0.003}, 24.6);
  REQUIRE_FALSE(unchanged);
  CHECK(unchanged.refusal().code == "no-change");
  const auto h = machine.receptance(24.633);
  // A spring to ground of 1e6 N/m instead of an absorber: D = +1e6.
  const double inertia = 10.0 * std::pow(2.0 * 3.14159265358979 * 24.633, 2);
  const auto impossible = fitted_from_line(machine, 10.0, 24.633, 1.0 / (1.0 + h * (-0.5 * inertia)), 24.6);
  REQUIRE_FALSE(impossible);
  CHECK(impossible.refusal().code == "not-an-absorber");
}

TEST_CASE("both split frequencies tell the absorber's frequency") {
  const auto splits = modal::split_frequencies(machine, {10.0, 24.1, 0.0});
  const auto fitted = fitted_from_splits(23.8, splits, 24.635);
  REQUIRE(fitted);
  CHECK(fitted->frequency_hz == Approx(24.1).epsilon(1e-12));
  CHECK(fitted->retune > 0.0);  // too low: stiffen
  CHECK_FALSE(fitted_from_splits(23.8, {24.0, 27.0}, 24.6));
}

TEST_CASE("achieved is measured against predicted in units of their joint uncertainty") {
  const auto quantity = base::Quantity::velocity;
  const auto result = achieved(tests::estimate(7e-3, 1e-4, quantity), tests::estimate(2.5e-3, 3e-4, quantity),
                               tests::estimate(2e-3, 4e-4, quantity));
  CHECK(result.ratio == Approx(2.5 / 7.0).epsilon(1e-12));
  CHECK(*result.predicted_ratio == Approx(2.0 / 7.0).epsilon(1e-12));
  CHECK(*result.deviation == Approx(1.0).epsilon(1e-12));
  CHECK_FALSE(achieved(tests::estimate(7e-3, 1e-4), tests::estimate(2e-3, 1e-4), {}).deviation);
}

TEST_CASE("every other remedy brings the line to what is allowed, put back into the mode") {
  const ForcingRange forcing{Forcing::unbalance, {24.57, 24.70}, 24.633};
  const double now = velocity(machine, 24.633);
  const auto all = remedies(machine, forcing, 7e-3, 2.8e-3);
  REQUIRE(all.size() == 7);
  CHECK(*of_kind(all, RemedyKind::less_force).amount == Approx(0.4).epsilon(1e-12));

  const auto check = [&](RemedyKind kind, const modal::OneMode& changed) {
    CHECK(7e-3 * velocity(changed, 24.633) / now == Approx(2.8e-3).epsilon(1e-6));
    CHECK(of_kind(all, kind).component_rms == Approx(2.8e-3).epsilon(1e-6));
  };
  const double stiffer = *of_kind(all, RemedyKind::stiffen).amount;
  CHECK(stiffer > 0.05);  // through the resonance to its other side
  check(RemedyKind::stiffen, {23.8 * (1.0 + stiffer), 0.009, 280.0});
  const double softer = *of_kind(all, RemedyKind::soften).amount;
  CHECK(softer < 0.0);
  check(RemedyKind::soften, {23.8 * (1.0 + softer), 0.009, 280.0});
  const double mass = *of_kind(all, RemedyKind::add_mass).amount;
  const double whole = 1.0 + mass / 280.0;
  check(RemedyKind::add_mass, {23.8 / std::sqrt(whole), 0.009 / std::sqrt(whole), 280.0 * whole});
  check(RemedyKind::add_damping, {23.8, *of_kind(all, RemedyKind::add_damping).amount, 280.0});

  const double faster = *of_kind(all, RemedyKind::higher_speed).amount;
  CHECK(faster > 24.633);
  CHECK(7e-3 * velocity(machine, faster) / now * std::pow(faster / 24.633, 2) == Approx(2.8e-3).epsilon(1e-6));
}

TEST_CASE("a remedy that cannot reach the target says so") {
  const ForcingRange forcing{Forcing::constant, {23.8, 23.8}, {}};
  const auto all = remedies(machine, forcing, 7e-3, 1e-5);
  CHECK_FALSE(of_kind(all, RemedyKind::add_damping).amount);
  CHECK(of_kind(all, RemedyKind::add_damping).component_rms == Approx(7e-3 * 0.009 / 0.2).epsilon(1e-9));
  CHECK_THROWS_AS(remedies(machine, {Forcing::random, {20.0, 30.0}, {}}, 7e-3, 1e-3), base::Error);
}
