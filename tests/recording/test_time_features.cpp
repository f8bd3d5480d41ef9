#include <algorithm>
#include <array>
#include <cmath>
#include <cstdint>
#include <limits>
#include <numbers>
#include <vector>

#include "stillmass/numeric/random.hpp"
#include "stillmass/recording/time_features.hpp"

#include "support/catch.hpp"
#include "support/memory_reader.hpp"

using namespace stillmass;
using recording::ChannelFeatures;
using tests::MemoryReader;

namespace {

constexpr double missing = std::numeric_limits<double>::quiet_NaN();

std::vector<double> sine(std::size_t n, double amplitude, double turns, double offset = 0.0) {
  std::vector<double> x(n);
  for (std::size_t i = 0; i < n; ++i) {
    x[i] =
        offset + amplitude * std::sin(2.0 * std::numbers::pi * turns * static_cast<double>(i) / static_cast<double>(n));
  }
  return x;
}

std::vector<double> gaussian(std::size_t n, std::uint64_t seed) {
  const numeric::Random random(seed);
  std::vector<double> x(n);
  for (std::size_t i = 0; i < n; ++i) x[i] = random.normal(0, static_cast<std::uint32_t>(i));
  return x;
}

ChannelFeatures features(std::vector<double> x, std::vector<recording::Segment> segments = {},
                         std::size_t chunk = 1 << 30) {
  const MemoryReader reader(1000.0, {{"a", std::move(x)}}, std::move(segments), chunk);
  return recording::time_features(reader, all_frames(reader), {}).front();
}

}  // namespace

TEST_CASE("a sine has crest factor sqrt 2 and kurtosis 1.5, whatever offset it rides on") {
  // Closed form over whole turns: mean of sin^2 1/2, of sin^4 3/8. 4096 samples a turn: the peak is met to 1e-6.
  for (const double offset : {0.0, 9.81, 1e6}) {
    const auto f = features(sine(200000, 3.0, 48.0, offset));
    CAPTURE(offset);
    CHECK(f.samples == 200000);
    CHECK(*f.mean == Approx(offset).margin(1e-12));
    CHECK(*f.deviation == Approx(3.0 / std::numbers::sqrt2).epsilon(1e-9));
    CHECK(*f.rms == Approx(std::hypot(offset, 3.0 / std::numbers::sqrt2)).epsilon(1e-12));
    CHECK(*f.crest_factor == Approx(std::numbers::sqrt2).epsilon(1e-6));
    CHECK(*f.kurtosis == Approx(1.5).epsilon(1e-8));
    CHECK_FALSE(f.is_cut());
  }
}

TEST_CASE("Gaussian noise has kurtosis 3") {
  // Standard error sqrt(24/n) = 0.0049 (Kendall & Stuart, from memory); limit 4 of them.
  CHECK(std::abs(*features(gaussian(1000000, 7)).kurtosis - 3.0) < 4.0 * std::sqrt(24.0 / 1e6));
}

TEST_CASE("a blow every thousand samples has the kurtosis and crest factor of such a pulse train") {
  // Two values, 1 with the share p, 0 otherwise: m2 = p (1-p), m4 = p (1-p) (1 - 3 p + 3 p^2): kurtosis
  // (1 - 3 p + 3 p^2) / (p (1-p)); peak 1 - p, so the crest factor is sqrt((1-p) / p).
  std::vector<double> x(100000, 0.0);
  for (std::size_t i = 500; i < x.size(); i += 1000) x[i] = 1.0;
  const double p = 0.001;
  const auto f = features(x);
  CHECK(*f.kurtosis == Approx((1.0 - 3.0 * p + 3.0 * p * p) / (p * (1.0 - p))).epsilon(1e-12));
  CHECK(*f.crest_factor == Approx(std::sqrt((1.0 - p) / p)).epsilon(1e-12));
}

TEST_CASE("the square wave has crest factor and kurtosis 1, and its tops are flat") {
  std::vector<double> x(10000, -2.0);
  for (std::size_t i = 0; i < x.size(); ++i) x[i] = i % 100 < 50 ? 2.0 : -2.0;
  const auto f = features(x);
  CHECK(*f.crest_factor == Approx(1.0));
  CHECK(*f.kurtosis == Approx(1.0));
  CHECK(f.flat_top == 50);
  CHECK(f.is_cut());
}

TEST_CASE("a constant has no crest factor and no kurtosis, and nothing at all has no numbers") {
  const auto f = features(std::vector<double>(5000, 0.1));
  CHECK(*f.mean == 0.1);
  CHECK(*f.deviation == 0.0);
  CHECK_FALSE(f.crest_factor);
  CHECK_FALSE(f.kurtosis);
  const auto none = features(std::vector<double>(50, missing));
  CHECK(none.samples == 0);
  CHECK_FALSE(none.mean);
  CHECK_FALSE(none.peak);
  CHECK_FALSE(none.at_full_scale);
}

TEST_CASE("missing samples count nowhere and part a flat top") {
  auto x = gaussian(9000, 8);
  for (double& v : x) v = std::clamp(v, -9.0, 9.0);
  for (const std::size_t i : {4000, 4001, 4003, 4004, 4005}) x[i] = 10.0;
  x[4002] = missing;
  const auto f = features(x);
  CHECK(f.samples == 8999);
  CHECK(f.flat_top == 3);
  auto whole = x;
  whole[4002] = 10.0;
  CHECK(features(whole).flat_top == 6);
}

TEST_CASE("a flat top is counted whole across chunks and ranges of a pass, not across a gap") {
  const auto middle = static_cast<std::size_t>(recording::pass_range_frames);
  auto x = gaussian(2 * middle + 100, 9);
  for (std::size_t i = middle - 3; i < middle + 4; ++i) x[i] = -20.0;
  for (const std::size_t chunk : {777, 1024, 100000}) {
    CHECK(features(x, {}, chunk).flat_top == 7);
    const auto cut = static_cast<std::int64_t>(middle);
    CHECK(features(x, {{0, cut, 0.0}, {cut, cut + 100, 900.0}}, chunk).flat_top == 4);
  }
  // A run over three ranges, and one that a greater value makes worthless.
  std::vector<double> flat(2 * middle + 100, 1.0);
  CHECK(features(flat).flat_top == static_cast<std::int64_t>(flat.size()));
  flat.back() = 2.0;
  flat.front() = -1.0;
  CHECK(features(flat).flat_top == 1);
}

TEST_CASE("samples at the recorder's full scale are counted where the file says where that is") {
  const double step = 1.0 / 32768.0;
  auto x = sine(4000, 0.99, 8.0);
  MemoryReader reader(1000.0, {{"a", x, base::Quantity::acceleration, recording::Role::vibration, step, 1.0}});
  CHECK(recording::time_features(reader, all_frames(reader), {}).front().at_full_scale == 0);
  x[100] = 1.0 - step;
  x[300] = -1.0;
  const MemoryReader full(1000.0, {{"a", x, base::Quantity::acceleration, recording::Role::vibration, step, 1.0}});
  const auto f = recording::time_features(full, all_frames(full), {}).front();
  CHECK(f.at_full_scale == 2);
  CHECK(f.is_cut());
  CHECK_FALSE(features(x).at_full_scale);
}

TEST_CASE("one and three threads give the same bits, other cuts the same numbers to rounding") {
  const auto n = static_cast<std::size_t>(recording::pass_range_frames) * 3 + 1234;
  auto x = gaussian(n, 10);
  x[5000] = missing;
  const MemoryReader reader(51200.0, {{"a", x}});
  base::Context three;
  three.threads = 3;
  const auto a = recording::time_features(reader, all_frames(reader), {}).front();
  const auto b = recording::time_features(reader, all_frames(reader), three).front();
  CHECK(*a.kurtosis == *b.kurtosis);
  CHECK(*a.deviation == *b.deviation);
  CHECK(*a.mean == *b.mean);
  const auto c = features(x, {}, 333);
  CHECK(*c.kurtosis == Approx(*a.kurtosis).epsilon(1e-12));
  CHECK(*c.rms == Approx(*a.rms).epsilon(1e-13));
  CHECK(*c.peak == Approx(*a.peak).epsilon(1e-13));
}
