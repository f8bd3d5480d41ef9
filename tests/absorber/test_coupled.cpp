#include <cmath>
#include <complex>
#include <numbers>

#include "stillmass/absorber/coupled.hpp"
#include "stillmass/absorber/transient.hpp"

#include "absorber/response.hpp"
#include "oracle/two_mass.hpp"
#include "support/catch.hpp"

using namespace stillmass::absorber;
namespace modal = stillmass::modal;
namespace oracle = stillmass::oracle;

namespace {

constexpr modal::OneMode machine{23.8, 0.009, 280.0};
constexpr modal::SprungMass absorber{15.0, 23.1, 0.12};

oracle::TwoMass two_mass(const modal::OneMode& mode, const modal::SprungMass& sprung) {
  return oracle::two_mass(mode.modal_mass_kg, mode.frequency_hz, mode.damping_ratio, sprung.mass_kg,
                          sprung.frequency_hz, sprung.damping_ratio);
}

double squared_ratio(double f) { return (f / machine.frequency_hz) * (f / machine.frequency_hz); }

}  // namespace

TEST_CASE("the two-mass oracle in frequency and in time agree") {
  // A force at 22 Hz for long enough that the start has died away: e^-(0.009 2 pi 23.8 20) is below 1e-11.
  const auto pair = two_mass(machine, absorber);
  constexpr double f = 22.0;
  const auto states = oracle::integrate(
      pair, [](double t) { return std::cos(2.0 * std::numbers::pi * f * t); }, 20.0, 2e-4);
  const auto steady = oracle::under_force(pair, 1.0, f);
  const auto& last = states.back();
  const auto turn = std::polar(1.0, 2.0 * std::numbers::pi * f * last.t);
  CHECK(last.x1 == Approx((steady.machine * turn).real()).margin(1e-6 * std::abs(steady.machine)));
  CHECK(last.x2 == Approx((steady.absorber * turn).real()).margin(1e-6 * std::abs(steady.absorber)));
}

TEST_CASE("the oracle balances its energy: what the force puts in, the dampers take out") {
  const auto pair = two_mass(machine, absorber);
  for (const double f : {20.0, 23.0, 26.0}) {
    const double w = 2.0 * std::numbers::pi * f;
    const auto x = oracle::under_force(pair, 1.0, f);
    const double in = -0.5 * w * x.machine.imag();  // of a real force: Re(F conj(i w x))/2
    const double out = 0.5 * w * w * (pair.c1 * std::norm(x.machine) + pair.c2 * std::norm(x.absorber - x.machine));
    CHECK(in == Approx(out).epsilon(1e-10));
  }
}

TEST_CASE("response, ratio and travel are those of the two-mass system") {
  const auto pair = two_mass(machine, absorber);
  const Coupled coupled(machine, absorber);
  for (const double f : {2.0, 18.0, 21.0, 23.0, 23.8, 25.0, 27.0, 60.0}) {
    const double s = squared_ratio(f);
    const auto with = oracle::under_force(pair, machine.stiffness(), f);
    const auto without = oracle::machine_alone(pair, machine.stiffness(), f);
    CHECK(coupled.displacement(s) == Approx(std::norm(with.machine)).epsilon(1e-10));
    CHECK(coupled.travel(s) == Approx(std::norm(with.absorber - with.machine)).epsilon(1e-10));
    CHECK(coupled.ratio(s) == Approx(std::norm(with.machine / without)).epsilon(1e-10));
    CHECK(coupled.bare(s) == Approx(1.0 / std::norm(without)).epsilon(1e-10));
  }
}

TEST_CASE("the weights of the sizing are those of unbalance and of a moving ground") {
  const auto pair = two_mass(machine, absorber);
  const Coupled coupled(machine, absorber);
  const double w1 = 2.0 * std::numbers::pi * machine.frequency_hz;
  for (const double f : {15.0, 22.0, 24.5, 30.0}) {
    const double s = squared_ratio(f);
    const double w = 2.0 * std::numbers::pi * f;
    const double me = 1.0;  // kg m
    const auto unbalance = oracle::under_force(pair, me * w * w, f);
    const double expected = std::norm(unbalance.machine) * std::pow(machine.modal_mass_kg / me, 2);
    CHECK(Response(coupled, Forcing::unbalance, Objective::displacement).value(s) == Approx(expected).epsilon(1e-10));
    CHECK(Response(coupled, Forcing::unbalance, Objective::velocity).value(s) == Approx(expected * s).epsilon(1e-10));

    const std::complex<double> y = -1.0 / (w * w);  // ground acceleration of 1 m/s2
    const auto ground = oracle::under_ground(pair, y, f);
    CHECK(Response(coupled, Forcing::base, Objective::displacement).value(s) ==
          Approx(std::norm(ground.machine - y) * std::pow(w1, 4)).epsilon(1e-9));
    CHECK(Response(coupled, Forcing::base, Objective::velocity).value(s) ==
          Approx(std::norm(ground.machine) * w * w * w1 * w1).epsilon(1e-9));
  }
}

TEST_CASE("slopes and sensitivities of the response are its derivatives") {
  for (const auto forcing : {Forcing::constant, Forcing::unbalance, Forcing::base}) {
    for (const auto objective : {Objective::velocity, Objective::displacement}) {
      const auto log_at = [&](double s, double tuning, double damping) {
        return std::log(Response(Coupled(0.06, 0.02, tuning, damping), forcing, objective).value(s));
      };
      const Response response(Coupled(0.06, 0.02, 0.95, 0.13), forcing, objective);
      constexpr double s = 0.87;
      constexpr double h = 1e-4;  // central differences: error about h^2 times the third derivative
      const auto slope = response.log_slope(s);
      CHECK(slope.first == Approx((log_at(s + h, 0.95, 0.13) - log_at(s - h, 0.95, 0.13)) / (2 * h)).epsilon(1e-4));
      CHECK(slope.second ==
            Approx((log_at(s + h, 0.95, 0.13) - 2 * log_at(s, 0.95, 0.13) + log_at(s - h, 0.95, 0.13)) / (h * h))
                .epsilon(1e-4));
      const double up = std::exp(h);
      const auto by = response.sensitivity(s);
      CHECK(by.log_tuning == Approx((log_at(s, 0.95 * up, 0.13) - log_at(s, 0.95 / up, 0.13)) / (2 * h)).epsilon(1e-4));
      CHECK(by.log_damping ==
            Approx((log_at(s, 0.95, 0.13 * up) - log_at(s, 0.95, 0.13 / up)) / (2 * h)).epsilon(1e-4));
    }
  }
}

TEST_CASE("an absorber without mass changes nothing, one on the wrong side of the band almost nothing") {
  const Coupled light(1e-12, 0.01, 1.0, 0.1);
  const Coupled far(0.05, 0.01, 20.0, 0.1);
  for (const double s : {0.5, 0.9, 1.0, 1.2}) CHECK(light.ratio(s) == Approx(1.0).epsilon(1e-8));
  // Far stiffer than the machine it is a rigid mass: far below resonance the machine follows its spring as before.
  CHECK(far.ratio(0.01) == Approx(1.0).epsilon(2e-3));
}

TEST_CASE("what an exactly tuned undamped absorber leaves is set by its own damping") {
  // At its own frequency D = -m w^2 (1 + 2 i z)/(2 i z), so |1/(H D)| = 2 z |1/H| / (m w^2 sqrt(1 + 4 z^2)) for z
  // small.
  for (const double damping : {0.002, 0.004, 0.008}) {
    const modal::SprungMass tuned{10.0, 24.633, damping};
    const double w = 2.0 * std::numbers::pi * 24.633;
    const auto h = machine.receptance(24.633);
    const auto d = -10.0 * w * w * std::complex<double>(1.0, 2.0 * damping) / std::complex<double>(0.0, 2.0 * damping);
    const double left = 1.0 / std::abs(1.0 + h * d);
    CHECK(std::sqrt(Coupled(machine, tuned).ratio(squared_ratio(24.633))) == Approx(left).epsilon(1e-9));
    CHECK(left == Approx(2.0 * damping / std::abs(h) / (10.0 * w * w)).epsilon(0.05));  // proportional to it
  }
}

TEST_CASE("the mean squares under a white force are the integrals of the response") {
  const Coupled pair(0.05, 0.02, 0.96, 0.13);
  double displacement = 0.0;
  double velocity = 0.0;
  double travel = 0.0;
  double bare = 0.0;
  constexpr double step = 1e-4;  // fine against the narrowest peak (0.04 wide)
  for (double g = 0.5 * step; g < 300.0; g += step) {
    const double s = g * g;
    displacement += pair.displacement(s) * step;
    velocity += s * pair.displacement(s) * step;
    travel += pair.travel(s) * step;
    bare += s / pair.bare(s) * step;
  }
  const double scale = 1.0 / std::numbers::pi;  // both signs of frequency, over 2 pi
  const double beyond = 1.0 / 300.0;            // of s |H|^2 ~ 1/g^2 above the end
  const auto white = white_response(pair);
  CHECK(white.displacement == Approx(displacement * scale).epsilon(1e-6));
  CHECK(white.travel == Approx(travel * scale).epsilon(1e-6));
  CHECK(white.velocity == Approx((velocity + beyond) * scale).epsilon(1e-5));
  CHECK(white_response(0.02).velocity == Approx((bare + beyond) * scale).epsilon(1e-5));
}

TEST_CASE("the travel while passing a split is bounded by the steady value and estimated for a sweep") {
  // An unbalance swept through the lower split at 1 Hz/s, stepped in time. Cronin's fit is for one mode and a constant
  // force; the second mode and the growing force come on top: 15 % is asked.
  const modal::SprungMass light{6.0, 24.635, 0.02};
  const ForcingRange forcing{Forcing::unbalance, {24.57, 24.70}, 24.633};
  const auto pair = two_mass(machine, light);
  const double line_rms = 7e-3;
  const double w_duty = 2.0 * std::numbers::pi * 24.633;
  const double force_duty = std::sqrt(2.0) * line_rms / w_duty / std::abs(oracle::machine_alone(pair, 1.0, 24.633));
  constexpr double rate = 1.0;
  constexpr double start = 17.0;
  const auto force = [&](double t) {
    const double f = start + rate * t;
    const double phase = 2.0 * std::numbers::pi * (start * t + 0.5 * rate * t * t);
    return force_duty * std::pow(f / 24.633, 2) * std::cos(phase);
  };
  double longest = 0.0;
  for (const auto& state : oracle::integrate(pair, force, 6.4, 2e-4)) {  // to 23.4 Hz, below the absorber's frequency
    longest = std::max(longest, std::abs(state.x2 - state.x1));
  }
  const auto passing = passing_travel(machine, light, forcing, line_rms, rate);
  CHECK(passing.split_hz == Approx(modal::split_frequencies(machine, light)[0]).epsilon(1e-12));
  CHECK(longest < 1.02 * passing.steady_m);
  REQUIRE(passing.passing_m);
  CHECK(*passing.passing_m == Approx(longest).epsilon(0.15));
}
