#include <cmath>
#include <numbers>
#include <vector>

#include "stillmass/base/error.hpp"
#include "stillmass/modal/decrement.hpp"
#include "stillmass/numeric/random.hpp"

#include "oracle/one_degree.hpp"
#include "support/catch.hpp"

using namespace stillmass;

TEST_CASE("D3: a shaft whose twist falls from 9 to 6 to 4 degrees") {
  // Grover, Mechanical Vibrations, Ex. 3.4.1: method and inputs; answers recomputed.
  const std::vector<double> degrees{9.0, 6.0, 4.0};
  const double decrement = modal::logarithmic_decrement(degrees);
  CHECK(decrement == Approx(0.40547).epsilon(2e-5));
  const double z = modal::damping_of_decrement(decrement);
  CHECK(z == Approx(0.064398).epsilon(1e-4));
  const double stiffness = 44e9 * std::numbers::pi * std::pow(0.1, 4) / 32.0 / 0.4;
  const double w = std::sqrt(stiffness / 0.06);
  CHECK(2.0 * z * std::sqrt(stiffness * 0.06) == Approx(32.785).epsilon(5e-3));
  CHECK(w / (2.0 * std::numbers::pi) == Approx(675.21).epsilon(5e-3));
  CHECK(2.0 * std::numbers::pi / (w * std::sqrt(1.0 - z * z)) == Approx(1.4841e-3).epsilon(5e-3));
}

TEST_CASE("D5: the decrement of a heavily damped mass") {
  // McLean & Nelson, Ex. 19.20: 2.095 (from the rounded period 0.261 s); exact 2.0927.
  CHECK(modal::decrement_of_damping(0.316) == Approx(2.095).epsilon(2e-3));
  CHECK(modal::decrement_of_damping(0.316) == Approx(2.0927).epsilon(1e-4));
}

TEST_CASE("D7: Thomson's mass on its spring") {
  // Thomson, Theory of Vibration, Ex. 2.4 (from memory): z = .0833, decrement .525, ratio of peaks 1.69.
  const double z = 0.12 / (2.0 * std::sqrt(20.0 * 10.0 / 386.0));
  CHECK(z == Approx(0.0833).epsilon(5e-3));
  CHECK(modal::decrement_of_damping(z) == Approx(0.525).epsilon(5e-3));
  CHECK(std::exp(modal::decrement_of_damping(z)) == Approx(1.69).epsilon(5e-3));
}

TEST_CASE("D8: Rao's motorcycle") {
  // Rao, Mechanical Vibrations, Ex. 2.11 (from memory): a quarter of the amplitude after half a cycle, period 2 s, 200
  // kg.
  const double z = modal::damping_of_decrement(2.0 * std::log(4.0));
  CHECK(z == Approx(0.4037).epsilon(1e-3));
  const double w = std::numbers::pi / std::sqrt(1.0 - z * z);
  CHECK(w == Approx(3.4338).epsilon(1e-3));
  CHECK(200.0 * w * w == Approx(2358.27).epsilon(1e-3));
  CHECK(2.0 * z * w * 200.0 == Approx(554.50).epsilon(1e-3));
}

TEST_CASE("decrement and damping are inverse to each other") {
  for (const double z : {0.0, 0.001, 0.1, 0.7}) {
    CHECK(modal::damping_of_decrement(modal::decrement_of_damping(z)) == Approx(z).margin(1e-15));
  }
  CHECK_THROWS_AS(modal::damping_of_decrement(-0.1), base::Error);
  CHECK_THROWS_AS(modal::logarithmic_decrement(std::vector<double>{1.0}), base::Error);
}

TEST_CASE("a ring-down gives its mode, beside another one outside the band") {
  const oracle::OneDegree mode{24.2, 0.01, 1.0};
  const oracle::OneDegree other{58.0, 0.012, 1.0};
  const numeric::Random random(3);
  std::vector<double> samples;
  for (std::uint64_t k = 0; k < 8192; ++k) {
    const double t = static_cast<double>(k) / 1024.0;
    samples.push_back(oracle::released(mode, 1.0, t) + 0.4 * oracle::released(other, 1.0, t) +
                      1e-3 * random.normal(k, 0));
  }
  const auto answer = modal::ring_down(samples, 1024.0, {17.0, 31.0});
  REQUIRE(answer);
  CHECK(answer->frequency.value == Approx(24.2).epsilon(1e-4));
  // The other mode leaks through the smoother's side lobes at -31 dB and less.
  CHECK(answer->damping_ratio.value == Approx(0.01).epsilon(5e-3));
  CHECK(answer->decay_db > 30.0);
}

TEST_CASE("a decay that is cut off at once is refused") {
  const oracle::OneDegree mode{24.2, 0.01, 1.0};
  std::vector<double> samples;
  for (int k = 0; k < 400; ++k) samples.push_back(oracle::released(mode, 1.0, k / 1024.0));
  const auto answer = modal::ring_down(samples, 1024.0, {17.0, 31.0});
  REQUIRE(!answer);
  CHECK(answer.refusal().code == "short-decay");
}
