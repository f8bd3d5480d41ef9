#include <cmath>
#include <numbers>

#include "stillmass/modal/attached.hpp"

#include "oracle/two_mass.hpp"
#include "support/catch.hpp"

namespace modal = stillmass::modal;
namespace oracle = stillmass::oracle;

namespace {

constexpr modal::OneMode machine{23.8, 0.009, 280.0};
constexpr modal::SprungMass absorber{15.0, 24.6, 0.05};

oracle::TwoMass pair_of(const modal::OneMode& mode, const modal::SprungMass& sprung) {
  return oracle::two_mass(mode.modal_mass_kg, mode.frequency_hz, mode.damping_ratio, sprung.mass_kg,
                          sprung.frequency_hz, sprung.damping_ratio);
}

}  // namespace

TEST_CASE("a sprung mass on a mode answers as the two-mass system does") {
  const auto pair = pair_of(machine, absorber);
  for (const double f : {1.0, 15.0, 21.5, 23.8, 24.6, 27.3, 40.0, 200.0}) {
    const auto exact = oracle::under_force(pair, 1.0, f);
    const auto h = machine.receptance(f);
    const auto with = h * modal::response_ratio(h, absorber.dynamic_stiffness(f));
    CHECK(std::abs(with - exact.machine) < 1e-12 * std::abs(exact.machine));
    const auto relative = with * absorber.relative_motion(f);
    CHECK(std::abs(relative - (exact.absorber - exact.machine)) < 1e-10 * std::abs(exact.absorber));
  }
}

TEST_CASE("a measured receptance is changed line by line, line 0 left alone") {
  constexpr double line_hz = 0.5;
  std::vector<std::complex<double>> measured;
  for (int k = 0; k < 80; ++k) measured.push_back(machine.receptance(k * line_hz));
  const auto with = modal::receptance_with(measured, line_hz, absorber);
  CHECK(with[0] == measured[0]);
  const auto pair = pair_of(machine, absorber);
  for (int k = 1; k < 80; ++k) {
    const auto exact = oracle::under_force(pair, 1.0, k * line_hz).machine;
    CHECK(std::abs(with[static_cast<std::size_t>(k)] - exact) < 1e-12 * std::abs(exact));
  }
}

TEST_CASE("an undamped pair splits as Den Hartog published") {
  // CHECKS.md A9: mu 0.2 gives 0.80109 and 1.24830 of the common frequency.
  const auto splits = modal::split_frequencies({1.0, 0.0, 1.0}, {0.2, 1.0, 0.0});
  CHECK(splits[0] == Approx(0.80109).epsilon(1e-5));
  CHECK(splits[1] == Approx(1.24830).epsilon(1e-5));
}

TEST_CASE("at a split frequency the undamped pair is singular, substituted back") {
  const modal::OneMode bare{23.8, 0.0, 280.0};
  const modal::SprungMass loose{15.0, 24.6, 0.0};
  for (const double f : modal::split_frequencies(bare, loose)) {
    const auto sum = 1.0 + bare.receptance(f) * loose.dynamic_stiffness(f);
    CHECK(std::abs(sum) < 1e-9);
  }
}

TEST_CASE("a rigid mass lowers the frequency as a sprung mass on a very hard spring does") {
  const double f = modal::frequency_with(machine, {20.0});
  CHECK(f == Approx(23.8 / std::sqrt(300.0 / 280.0)).epsilon(1e-14));
  CHECK(modal::split_frequencies(machine, {20.0, 1e5, 0.0})[0] == Approx(f).epsilon(1e-6));
  CHECK(modal::RigidMass{20.0}.dynamic_stiffness(50.0).real() ==
        Approx(-20.0 * std::pow(2.0 * std::numbers::pi * 50.0, 2)).epsilon(1e-14));
}

TEST_CASE("the damped splits are the poles of the coupled system, substituted back") {
  // At a pole p of the pair the determinant of the equations of motion is zero.
  for (const double damping : {0.001, 0.05, 0.3, 2.0}) {
    const modal::SprungMass sprung{15.0, 24.6, damping};
    const auto pair = pair_of(machine, sprung);
    for (const auto& split : modal::damped_splits(machine, sprung)) {
      if (split.damping_ratio >= 1.0) continue;  // two real poles, of which the mean is given
      const double w = 2.0 * std::numbers::pi * split.frequency_hz;
      const std::complex<double> p(-split.damping_ratio * w,
                                   w * std::sqrt(1.0 - split.damping_ratio * split.damping_ratio));
      const auto spring = pair.k2 + pair.c2 * p;
      const auto a11 = pair.m1 * p * p + pair.c1 * p + pair.k1 + spring;
      const auto a22 = pair.m2 * p * p + spring;
      CHECK(std::abs(a11 * a22 - spring * spring) < 1e-8 * std::abs(a11 * a22) + 1e-8 * std::abs(spring * spring));
    }
  }
  const auto light = modal::damped_splits({23.8, 0.0, 280.0}, {15.0, 24.6, 1e-9});
  const auto undamped = modal::split_frequencies(machine, absorber);
  CHECK(light[0].frequency_hz == Approx(undamped[0]).epsilon(1e-9));
  CHECK(light[1].frequency_hz == Approx(undamped[1]).epsilon(1e-9));
}

TEST_CASE("a trial absorber gives the modal mass of the textbook examples") {
  SECTION("Rao 5th ed., Ex. 9.15: tuned to 3000 r/min, 2 kg, lower split 2500 r/min (CHECKS.md A13)") {
    const auto mass = modal::modal_mass_from_split(50.0, {2.0, 50.0, 0.0}, 2500.0 / 60.0);
    REQUIRE(mass);
    CHECK(*mass == Approx(14.876).epsilon(1e-4));
  }
  SECTION("Grover, Ex. 5.7.2: tuned to 220, 1 kg, splits 188 and 258 c/min (CHECKS.md A11)") {
    const modal::SprungMass trial{1.0, 220.0 / 60.0, 0.0};
    const double low = 1.0 / *modal::modal_mass_from_split(220.0 / 60.0, trial, 188.0 / 60.0);
    const double high = 1.0 / *modal::modal_mass_from_split(220.0 / 60.0, trial, 258.0 / 60.0);
    CHECK(low == Approx(0.09965).epsilon(1e-3));
    CHECK(high == Approx(0.10241).epsilon(1e-3));
    CHECK(2.0 / (low + high) == Approx(9.898).epsilon(1e-3));
  }
}

TEST_CASE("both splits give the machine back") {
  const auto splits = modal::split_frequencies(machine, absorber);
  const auto found = modal::machine_from_splits(splits, absorber);
  REQUIRE(found);
  CHECK(found->frequency_hz == Approx(23.8).epsilon(1e-12));
  CHECK(found->modal_mass_kg == Approx(280.0).epsilon(1e-10));
}

TEST_CASE("frequencies that cannot belong together give no mass") {
  CHECK_FALSE(modal::modal_mass_from_split(23.8, absorber, 24.2));  // between the two of them
  CHECK_FALSE(modal::machine_from_splits({25.0, 27.0}, absorber));
}

TEST_CASE("a mode without a modal mass has no plain numbers") {
  modal::Mode mode;
  mode.frequency.value = 23.8;
  mode.damping_ratio.value = 0.009;
  CHECK_FALSE(modal::plain(mode));
  mode.modal_mass = stillmass::base::Estimate{280.0, 20.0, {}, stillmass::base::Quantity::mass};
  REQUIRE(modal::plain(mode));
  CHECK(modal::plain(mode)->modal_mass_kg == 280.0);
}
