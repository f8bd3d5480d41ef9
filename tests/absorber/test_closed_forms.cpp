#include <cmath>
#include <numbers>

#include "stillmass/absorber/closed_forms.hpp"
#include "stillmass/absorber/coupled.hpp"
#include "stillmass/absorber/minimax.hpp"
#include "stillmass/base/error.hpp"

#include "support/catch.hpp"

using namespace stillmass::absorber;

namespace {

double true_maximum(double mass_ratio, Forcing forcing, const Sizing& sizing, double machine_damping = 0.0) {
  SizingProblem problem;
  problem.mass_ratio = mass_ratio;
  problem.machine_damping = machine_damping;
  problem.forcing = forcing;
  problem.objective = Objective::displacement;
  return worst(problem, sizing.tuning, sizing.damping_ratio);
}

}  // namespace

TEST_CASE("Den Hartog's optimum has its published values") {
  // CHECKS.md A1 (Den Hartog sec. 3.3; Brock 1946), digits as recomputed there.
  const auto small = classical(1.0 / 20.0, Forcing::constant);
  CHECK(small.tuning == Approx(0.95238).epsilon(1e-5));
  CHECK(small.damping_ratio == Approx(0.13363).epsilon(1e-4));
  CHECK(small.height == Approx(6.4031).epsilon(1e-5));
  CHECK(true_maximum(0.05, Forcing::constant, small) == Approx(6.4084).epsilon(1e-5));
  const auto large = classical(0.25, Forcing::constant);
  CHECK(large.tuning == Approx(0.8).epsilon(1e-14));
  CHECK(large.damping_ratio == Approx(0.27386).epsilon(1e-5));
  CHECK(large.height == Approx(3.0).epsilon(1e-14));
  CHECK(true_maximum(0.25, Forcing::constant, large) == Approx(3.0122).epsilon(1e-4));
  // The same damping on the machine's frequency, as Den Hartog has it: 0.2191 (the trap of CHECKS.md section 7).
  CHECK(large.damping_ratio * large.tuning == Approx(0.2191).epsilon(1e-3));
}

TEST_CASE("the fixed points stand where Brock put them, at one height whatever the damping") {
  // CHECKS.md A2: mu 0.1: frequency ratios 0.84304 and 1.05236, height 4.58258.
  const auto points = fixed_points(0.1);
  CHECK(std::sqrt(points[0]) == Approx(0.84304).epsilon(1e-5));
  CHECK(std::sqrt(points[1]) == Approx(1.05236).epsilon(1e-5));
  for (const double damping : {0.01, 0.18, 0.9}) {
    const Coupled pair(0.1, 0.0, 1.0 / 1.1, damping);
    for (const double s : points) CHECK(std::sqrt(pair.displacement(s)) == Approx(4.58258).epsilon(1e-5));
  }
}

TEST_CASE("the fixed points at constant tuning have Brock's unequal heights") {
  // CHECKS.md A2: mu 0.1, tuning 1: at 0.88418 and 1.10373 of the frequency, whose squares are 1 -+
  // sqrt(mu/(2+mu)); 7.141, 2.941.
  const double half = std::sqrt(0.1 / 2.1);
  for (const double damping : {0.05, 0.5}) {
    const Coupled pair(0.1, 0.0, 1.0, damping);
    CHECK(std::sqrt(pair.displacement(1.0 - half)) == Approx(7.141).epsilon(2e-4));
    CHECK(std::sqrt(pair.displacement(1.0 + half)) == Approx(2.941).epsilon(2e-4));
  }
}

TEST_CASE("the viscous damper without a spring has its published optimum") {
  // CHECKS.md A3: mu 1: 0.28868 (0.288 published), maximum 3; mu 0.25: 0.4216 (recomputed), 9.
  CHECK(houdaille(1.0).damping_ratio == Approx(0.28868).margin(6e-6));
  CHECK(houdaille(1.0).height == Approx(3.0).epsilon(1e-14));
  CHECK(houdaille(0.25).damping_ratio == Approx(0.4216).epsilon(1e-4));
  // The height is that of the coupled pair with a vanishing spring: c = 2 z m2 w1.
  const double tuning = 1e-4;
  const Sizing soft{tuning, houdaille(1.0).damping_ratio / tuning, 0.0};
  double highest = 0.0;
  for (double g = 0.5; g < 1.5; g += 1e-4) {
    highest = std::max(highest, Coupled(1.0, 0.0, soft.tuning, soft.damping_ratio).displacement(g * g));
  }
  CHECK(std::sqrt(highest) == Approx(3.0).epsilon(1e-5));
}

TEST_CASE("the exact optimum of Nishihara and Asami has the values of the table") {
  // CHECKS.md A4.
  struct Row {
    double mu, tuning, damping, height;
  };
  for (const Row& row : {Row{0.01, 0.990099, 0.060962, 14.179643}, Row{0.02, 0.980391, 0.085829, 10.052963},
                         Row{0.05, 0.952372, 0.133938, 6.407921}, Row{0.10, 0.909058, 0.185470, 4.589166},
                         Row{0.20, 0.833223, 0.252173, 3.325439}, Row{0.25, 0.799841, 0.276785, 3.009593},
                         Row{0.50, 0.666223, 0.360507, 2.248030}, Row{1.0, 0.499022, 0.447807, 1.745662}}) {
    const auto exact = exact_constant(row.mu);
    CHECK(exact.tuning == Approx(row.tuning).margin(1e-6));
    CHECK(exact.damping_ratio == Approx(row.damping).margin(1e-6));
    CHECK(exact.height == Approx(row.height).margin(1e-6));
    CHECK(true_maximum(row.mu, Forcing::constant, exact) == Approx(exact.height).epsilon(1e-6));
  }
}

TEST_CASE("Warburton's rows for unbalance, base and random force have their published values") {
  // CHECKS.md A5, A6, A7 at mu 0.1; the true maxima at these settings as recomputed there.
  const auto unbalance = classical(0.1, Forcing::unbalance);
  CHECK(unbalance.tuning == Approx(0.95346).epsilon(1e-5));
  CHECK(unbalance.damping_ratio == Approx(0.18898).epsilon(1e-4));
  CHECK(unbalance.height == Approx(4.2640).epsilon(1e-5));
  CHECK(true_maximum(0.1, Forcing::unbalance, unbalance) == Approx(4.3239).epsilon(1e-4));

  const auto base = classical(0.1, Forcing::base);
  CHECK(base.tuning == Approx(0.88607).epsilon(1e-5));
  CHECK(base.damping_ratio == Approx(0.18943).epsilon(1e-4));
  CHECK(base.height == Approx(4.9193).margin(6e-5));
  CHECK(true_maximum(0.1, Forcing::base, base) == Approx(4.9277).epsilon(1e-4));

  const auto random = classical(0.1, Forcing::random);
  CHECK(random.tuning == Approx(0.93154).epsilon(1e-5));
  CHECK(random.damping_ratio == Approx(0.15254).epsilon(1e-5));
  CHECK(random.height == Approx(3.126).epsilon(1e-4));
  CHECK(true_maximum(0.1, Forcing::random, random) == Approx(3.1261).epsilon(2e-5));
}

TEST_CASE("the fit of Ioi and Ikeda has the values of the table") {
  // CHECKS.md A8, columns "fit": tuning, damping, true maximum.
  struct Row {
    double mu, z, tuning, damping, height;
  };
  for (const Row& row : {Row{0.05, 0.01, 0.94910, 0.13499, 5.7924}, Row{0.05, 0.05, 0.93414, 0.14032, 4.1654},
                         Row{0.10, 0.01, 0.90516, 0.18608, 4.2704}, Row{0.10, 0.05, 0.88779, 0.19161, 3.3390},
                         Row{0.10, 0.10, 0.86239, 0.19794, 2.6249}, Row{0.20, 0.05, 0.80783, 0.25772, 2.6543}}) {
    const auto fit = ioi_ikeda(row.mu, row.z);
    CHECK(fit.tuning == Approx(row.tuning).margin(1e-5));
    CHECK(fit.damping_ratio == Approx(row.damping).margin(1e-5));
    CHECK(true_maximum(row.mu, Forcing::constant, fit, row.z) == Approx(row.height).epsilon(1e-4));
  }
}

TEST_CASE("undamped absorbers split and weigh as the textbooks say") {
  // CHECKS.md A9 (Den Hartog Fig. 3.6; Grover eq. 5.7.9).
  struct Row {
    double mu, lower, upper;
  };
  for (const Row& row : {Row{0.05, 0.8944, 1.1180}, Row{0.1, 0.8543, 1.1705}, Row{0.15, 0.8249, 1.2122},
                         Row{0.2, 0.80109, 1.24830}, Row{0.25, 0.7808, 1.2808}, Row{0.3, 0.7630, 1.3107}}) {
    const auto splits = undamped_splits(row.mu);
    CHECK(splits[0] == Approx(row.lower).margin(6e-5));
    CHECK(splits[1] == Approx(row.upper).margin(6e-5));
    CHECK(splits[0] * splits[1] == Approx(1.0).epsilon(1e-14));
    CHECK(mass_ratio_for_split(splits[0]) == Approx(row.mu).epsilon(1e-10));
    CHECK(mass_ratio_for_split(splits[1]) == Approx(row.mu).epsilon(1e-10));
  }
}

TEST_CASE("the textbook examples of undamped absorbers come out") {
  constexpr double two_pi = 2.0 * std::numbers::pi;
  SECTION("Grover Ex. 5.7.1, a torsional absorber with splits at least 20 % off (CHECKS.md A10)") {
    const double mu = std::max(mass_ratio_for_split(0.8), mass_ratio_for_split(1.2));
    CHECK(mu == Approx(0.2025).epsilon(1e-12));
    const double inertia = mu * 0.735;
    CHECK(inertia == Approx(0.14884).epsilon(1e-4));
    const double stiffness = inertia * 1000.0 * 1000.0;
    CHECK(stiffness / (4.0 * 0.1 * 0.1) == Approx(3.7209e6).epsilon(1e-4));
    CHECK(294.0 / stiffness == Approx(1.9753e-3).epsilon(1e-4));
  }
  SECTION("Grover Ex. 5.7.2, resonances outside 150 to 310 c/min (CHECKS.md A11)") {
    const double mu = std::max(mass_ratio_for_split(150.0 / 220.0), mass_ratio_for_split(310.0 / 220.0));
    const double mass = mu * 9.898;
    CHECK(mass == Approx(6.097).epsilon(1e-3));
    CHECK(mass * std::pow(two_pi * 220.0 / 60.0, 2) == Approx(3236.2).epsilon(1e-3));
  }
  SECTION("Rao 5th ed. Ex. 9.14 (CHECKS.md A12)") {
    const auto made = cancel(250.0, 100.0, 2e-3);
    CHECK(made.mass_kg == Approx(0.3166).epsilon(1e-3));
    CHECK(made.stiffness == Approx(125009.0).epsilon(1e-3));
  }
  SECTION("Rao 5th ed. Ex. 9.15, resonances outside 2000 to 4000 r/min (CHECKS.md A13)") {
    const double mu = std::max(mass_ratio_for_split(2000.0 / 3000.0), mass_ratio_for_split(4000.0 / 3000.0));
    CHECK(mu * 14.876 == Approx(10.3227).epsilon(2e-3));
    CHECK(mu * 14.876 * std::pow(two_pi * 50.0, 2) == Approx(1.0188e6).epsilon(2e-3));
  }
  SECTION("Rao ch. 9, 200 kg, 0.01 kg m, 1200 r/min, splits 20 % off (CHECKS.md A14)") {
    const double mass = mass_ratio_for_split(0.8) * 200.0;
    CHECK(mass == Approx(40.5).epsilon(1e-3));
    const double w = two_pi * 20.0;
    CHECK(mass * w * w == Approx(639.55e3).epsilon(1e-3));
    CHECK(0.01 * w * w / (mass * w * w) == Approx(0.247e-3).epsilon(1e-3));
  }
  SECTION("Inman Ex. 5.3.1 (CHECKS.md A15)") {
    const auto made = cancel(13.0, 3.0, 2e-3);
    CHECK(made.stiffness == Approx(6500.0).epsilon(1e-12));
    CHECK(made.mass_kg == Approx(18.29).epsilon(1e-3));
    CHECK(made.mass_kg / 73.16 == Approx(0.25).epsilon(1e-3));
  }
}

TEST_CASE("a mass ratio that is not positive is refused") {
  CHECK_THROWS_AS(classical(0.0, Forcing::constant), stillmass::base::Error);
  CHECK_THROWS_AS(classical(2.0, Forcing::base), stillmass::base::Error);
  CHECK_THROWS_AS(exact_constant(std::nan("")), stillmass::base::Error);
  CHECK_THROWS_AS(cancel(1.0, 0.0, 1.0), stillmass::base::Error);
}

TEST_CASE("names of forcings and objectives read back") {
  for (const auto forcing : {Forcing::constant, Forcing::unbalance, Forcing::base, Forcing::random}) {
    CHECK(forcing_named(name(forcing)) == forcing);
  }
  for (const auto objective : {Objective::velocity, Objective::displacement}) {
    CHECK(objective_named(name(objective)) == objective);
  }
  CHECK_FALSE(forcing_named("other"));
}
