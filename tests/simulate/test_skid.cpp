#include <cmath>
#include <complex>
#include <numbers>

#include "stillmass/base/error.hpp"
#include "stillmass/simulate/skid.hpp"
#include "stillmass/simulate/truth.hpp"

#include "simulate/skids.hpp"
#include "support/catch.hpp"
#include "support/demo.hpp"

using namespace stillmass;
using simulate::Condition;
using simulate::Skid;
using Complex = std::complex<double>;

namespace {

constexpr double two_pi = 2.0 * std::numbers::pi;

const std::string some_recording = tests::recording("steady", 1000, 1);

// The frequency of the highest response between lo and hi, to 1e-9 of it.
template <class Response>
double peak(Response response, double lo, double hi) {
  const double golden = 0.5 * (std::sqrt(5.0) - 1.0);
  while (hi - lo > 1e-9 * hi) {
    const double a = hi - golden * (hi - lo);
    const double b = lo + golden * (hi - lo);
    (response(a) > response(b) ? hi : lo) = response(a) > response(b) ? b : a;
  }
  return 0.5 * (lo + hi);
}

// q of (K + i w C - w^2 M) q = F by elimination.
std::vector<Complex> direct_solution(const Skid& skid, const std::vector<double>& force, double f) {
  const std::size_t n = skid.dofs();
  const double w = two_pi * f;
  std::vector<std::vector<Complex>> a(n, std::vector<Complex>(n));
  std::vector<Complex> b(force.begin(), force.end());
  for (std::size_t i = 0; i < n; ++i) {
    for (std::size_t j = 0; j < n; ++j) a[i][j] = {skid.stiffness()(i, j), w * skid.damping()(i, j)};
    a[i][i] -= w * w * skid.mass()[i];
  }
  for (std::size_t k = 0; k < n; ++k) {
    for (std::size_t i = k + 1; i < n; ++i) {
      const Complex factor = a[i][k] / a[k][k];
      for (std::size_t j = k; j < n; ++j) a[i][j] -= factor * a[k][j];
      b[i] -= factor * b[k];
    }
  }
  for (std::size_t k = n; k-- > 0;) {
    for (std::size_t j = k + 1; j < n; ++j) b[k] -= a[k][j] * b[j];
    b[k] /= a[k][k];
  }
  return b;
}

Complex along(const std::vector<double>& pattern, const std::vector<Complex>& q) {
  Complex sum = 0.0;
  for (std::size_t i = 0; i < q.size(); ++i) sum += pattern[i] * q[i];
  return sum;
}

}  // namespace

TEST_CASE("a body on springs has the natural frequency sqrt(k/m) and its own mass as modal mass") {
  const auto truth = simulate::truth_of(tests::parsed(tests::one_body(some_recording)));
  CHECK(truth.stopped.front().frequency_hz == Approx(20.0).epsilon(1e-12));
  CHECK(truth.stopped.front().damping_ratio == 0.02);
  CHECK(truth.stopped.front().modal_mass_kg(0) == Approx(100.0).epsilon(1e-12));
  CHECK(truth.stopped.size() == 6);
}

TEST_CASE("springs off the centre hold rotation with k times arm squared") {
  const auto file = tests::parsed(tests::one_body(some_recording));
  const Skid skid(file, Condition::stopped, false);
  // About x: four springs, arms 0.5 m along y (k of z) and along z (k of y).
  const double expected = 4.0 * (0.25 * 1e7 + 0.25 * 394784.17604357434);
  CHECK(skid.stiffness()(3, 3) == Approx(expected).epsilon(1e-12));
}

TEST_CASE("a place off the centre moves with the rotation times its arm") {
  const auto file = tests::parsed(tests::one_body(some_recording));
  const Skid skid(file, Condition::stopped, false);
  const auto p = skid.pattern(0, {0.2, 0.3, 0.4}, {0.0, 1.0, 0.0});
  // y moves by y - z * (rotation about x) + x * (rotation about z)
  CHECK(p == std::vector<double>{0.0, 1.0, 0.0, -0.4, 0.0, 0.2});
}

TEST_CASE("the running machine's supports are stiffer by the shift squared") {
  auto file = tests::parsed(tests::one_body(some_recording));
  file.running_shift = 0.01;
  const auto truth = simulate::truth_of(file);
  CHECK(truth.running.front().frequency_hz == Approx(20.2).epsilon(1e-12));
  CHECK(truth.stopped.front().frequency_hz == Approx(20.0).epsilon(1e-12));
}

TEST_CASE("the demo skid's superposed modes with absorber solve the equations of motion") {
  const auto file = simulate::read_skid_file(tests::demo_file("skid.toml"));
  for (const bool fitted : {false, true}) {
    const Skid skid(file, Condition::running, fitted);
    const auto in = skid.pattern(1, {0.66, 0.1, 0.8}, {0.3, 1.0, -0.5});
    const auto out = skid.pattern(file.points[0]);
    for (const double f : {3.0, 10.6, 23.8, 24.633, 24.66, 52.0, 147.8, 600.0}) {
      const Complex direct = along(out, direct_solution(skid, in, f));
      CHECK(std::abs(skid.receptance(out, in, f) - direct) < 1e-9 * std::abs(direct));
    }
  }
}

TEST_CASE("the mobility of the demo skid peaks where its truth says, with height 1 / (2 zeta w m)") {
  const auto file = simulate::read_skid_file(tests::demo_file("skid.toml"));
  const Skid skid(file, Condition::stopped, false);
  const auto p = skid.pattern(file.points[0]);
  const auto mobility = [&](double f) { return two_pi * f * std::abs(skid.receptance(p, p, f)); };
  const auto mode = simulate::truth_of(file).stopped[2];
  const double height = 1.0 / (2.0 * mode.damping_ratio * two_pi * mode.frequency_hz * mode.modal_mass_kg(0));
  const double at = peak(mobility, mode.frequency_hz - 1.0, mode.frequency_hz + 1.0);
  // The other modes' tails shift the peak by a small part of the bandwidth and its height by their own.
  CHECK(std::abs(at - mode.frequency_hz) < 0.02 * 2.0 * mode.damping_ratio * mode.frequency_hz);
  CHECK(mobility(at) == Approx(height).epsilon(0.01));
}

TEST_CASE("an undamped absorber splits the mode at the published frequencies") {
  // CHECKS A9 (Den Hartog): mu = 0.2 gives 0.80109 and 1.24830 of the natural frequency.
  auto file = tests::parsed(tests::one_body(some_recording + R"(
[absorber]
point = "centre"
mass_kg = 20
frequency_hz = 20
damping_ratio = 1e-9
)"));
  file.damping_ratios = {1e-9};
  const Skid skid(file, Condition::running, true);
  const auto p = skid.pattern(file.points[0]);
  const auto response = [&](double f) { return std::abs(skid.receptance(p, p, f)); };
  CHECK(peak(response, 15.0, 17.0) / 20.0 == Approx(0.80109).epsilon(1e-5));
  CHECK(peak(response, 24.0, 26.0) / 20.0 == Approx(1.24830).epsilon(1e-5));
  CHECK(response(20.0) < 1e-6 * response(10.0));
}

TEST_CASE("a body that nothing holds is refused") {
  auto file = tests::parsed(tests::one_body(some_recording));
  file.springs.resize(1);
  CHECK_THROWS_AS(Skid(file, Condition::stopped, false), base::Error);
  CHECK_THROWS_AS(Skid(tests::parsed(tests::one_body(some_recording)), Condition::running, true), base::Error);
}
