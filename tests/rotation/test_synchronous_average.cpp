#include <cmath>
#include <cstdint>
#include <numbers>
#include <vector>

#include "stillmass/base/error.hpp"
#include "stillmass/numeric/random.hpp"
#include "stillmass/rotation/order_track.hpp"
#include "stillmass/rotation/synchronous_average.hpp"

#include "signals.hpp"
#include "support/catch.hpp"

using namespace stillmass;
using tests::MemoryReader;
using tests::sampled;

namespace {

constexpr double pi = std::numbers::pi;
constexpr double rate = 4096.0;

// 24.7 Hz with a slow swing of 1 %.
double turns_at(double t) { return 24.7 * t + 0.04 * std::sin(2.0 * pi * 0.9 * t); }

double mark(double t) {
  const double phase = turns_at(t) - std::floor(turns_at(t) + 0.5);
  return 2.5 * (std::tanh(phase / 0.01) - std::tanh((phase - 0.08) / 0.01));
}

template <class Signal>
MemoryReader running(double duration_s, Signal signal) {
  return {rate,
          {{"motor", sampled(rate, duration_s, signal)},
           {"mark", sampled(rate, duration_s, mark), base::Quantity::pulse, recording::Role::tacho}}};
}

double synchronous(double t) {
  const double turn = 2.0 * pi * turns_at(t);
  const double deg = pi / 180.0;
  return 0.7 + 2.0 * std::cos(turn - 40.0 * deg) + 0.5 * std::cos(2.0 * turn - 250.0 * deg) +
         0.3 * std::cos(7.0 * turn - 10.0 * deg);
}

rotation::SynchronousAverage averaged(const recording::Reader& reader, rotation::SynchronousSettings settings = {},
                                      unsigned threads = 1) {
  base::Context context;
  context.threads = threads;
  const auto answer = rotation::synchronous_average(reader, settings, context);
  REQUIRE(answer);
  return answer->channels.front();
}

const rotation::SynchronousLine& at_order(const rotation::SynchronousAverage& average, double order) {
  for (const auto& line : average.lines) {
    if (std::abs(line.order - order) < 1e-9) return line;
  }
  FAIL("no such order");
  return average.lines.front();
}

double distance_deg(double a, double b) { return std::abs(std::remainder(a - b, 360.0)); }

}  // namespace

TEST_CASE("the averaged waveform is what was put in, and its lines have the amplitudes and lags put in") {
  // Closed form: the samples of the waveform at i/64 turns; r.m.s. amplitudes peak / sqrt 2; lag as DESIGN says.
  const auto average = averaged(running(20.0, synchronous));
  CHECK(average.channel == "motor");
  CHECK(average.samples_per_turn == 64);
  CHECK(average.blocks >= 490);
  CHECK(*average.speed_hz == Approx(24.7).epsilon(1e-3));
  REQUIRE(average.waveform.size() == 64);
  for (std::size_t i = 0; i < 64; ++i) {
    const double turn = 2.0 * pi * static_cast<double>(i) / 64.0;
    const double deg = pi / 180.0;
    const double expected = 0.7 + 2.0 * std::cos(turn - 40.0 * deg) + 0.5 * std::cos(2.0 * turn - 250.0 * deg) +
                            0.3 * std::cos(7.0 * turn - 10.0 * deg);
    CHECK(std::abs(average.waveform[i] - expected) < 0.01);  // the tacho's edge is met to 0.1 degrees
    CHECK(average.standard_error(i) < 1e-3);
  }
  CHECK(average.mean == Approx(0.7).epsilon(1e-3));
  const auto check = [&](double order, double peak, double lag) {
    const auto& line = at_order(average, order);
    CAPTURE(order);
    CHECK(line.amplitude_rms.value == Approx(peak / std::numbers::sqrt2).epsilon(1e-3));
    CHECK(distance_deg(line.phase_lag_deg, lag) < 0.2 * order);
    CHECK(std::abs(std::abs(line.value) - line.amplitude_rms.value) < 1e-12);
  };
  check(1.0, 2.0, 40.0);
  check(2.0, 0.5, 250.0);
  check(7.0, 0.3, 10.0);
  CHECK(at_order(average, 3.0).amplitude_rms.value < 1e-3);
  CHECK(average.lines.size() == 20);
  const double power = 0.5 * (4.0 + 0.25 + 0.09);
  CHECK(average.mean_square == Approx(power).epsilon(2e-3));
  CHECK(*average.synchronous_share == Approx(1.0).margin(1e-3));
}

TEST_CASE("a steady tone of another frequency falls as 1/K and stands as half the power in the share") {
  // The mean over K whole turns of a tone of q turns a turn is at most 1 / (K sin(pi q)) of it (geometric sum): with
  // 31.37 Hz over 24.7 Hz, sin(pi 1.27) = 0.75. Noise would fall as 1/sqrt K.
  const auto tone = [](double t) { return 2.0 * std::cos(2.0 * pi * 31.37 * t); };
  for (const double seconds : {5.0, 20.0, 80.0}) {
    const auto average = averaged(running(seconds, tone));
    const auto k = static_cast<double>(average.blocks);
    double greatest = 0.0;
    for (const double x : average.waveform) greatest = std::max(greatest, std::abs(x));
    CAPTURE(seconds, average.blocks);
    // The swing of the speed turns the tone's phase by 0.04 turns, so some of it stays out of step: 1.5 times the sum.
    CHECK(greatest < 1.5 * 2.0 / (k * 0.75));
    CHECK(*average.synchronous_share < 0.01);
  }
  const auto both = averaged(running(
      40.0, [&](double t) { return 2.0 * std::cos(2.0 * pi * turns_at(t)) + 2.0 * std::cos(2.0 * pi * 31.37 * t); }));
  CHECK(*both.synchronous_share == Approx(0.5).epsilon(0.01));
}

TEST_CASE("in noise the lines scatter as their uncertainties say and the noise left is taken off the share") {
  // 60 recordings: scatter known to 9 %, limit 30 %. Independent: white noise of unit variance leaves 1 / n in each
  // part of a coefficient sqrt 2 / n times the sum over n samples, so u = 1 / sqrt(n K), n the samples of a turn.
  double square = 0.0, claimed = 0.0, phase_square = 0.0, phase_claimed = 0.0, share = 0.0, known = 0.0;
  constexpr int cases = 60;
  for (std::uint64_t c = 0; c < cases; ++c) {
    const numeric::Random random(17);
    const auto average = averaged(running(4.0, [&](double t) {
      const auto i = static_cast<std::uint32_t>(std::lround(t * rate));
      return std::cos(2.0 * pi * turns_at(t) - 1.0) + random.normal(c, i);
    }));
    const auto& line = at_order(average, 1.0);
    square += std::pow(line.amplitude_rms.value - 1.0 / std::numbers::sqrt2, 2) / cases;
    claimed += *line.amplitude_rms.u / cases;
    phase_square += std::pow(distance_deg(line.phase_lag_deg, 180.0 / pi), 2) / cases;
    phase_claimed += line.phase_u_deg / cases;
    share += *average.synchronous_share / cases;
    known += 1.0 / std::sqrt(static_cast<double>(average.blocks) * rate / 24.7) / cases;
  }
  CHECK(claimed == Approx(std::sqrt(square)).epsilon(0.30));
  CHECK(claimed == Approx(known).epsilon(0.10));
  CHECK(phase_claimed == Approx(std::sqrt(phase_square)).epsilon(0.30));
  // The resampled noise ends at 0.5 x 64 orders, 790 Hz of 2048: 1/2 of 1/2 + 0.386.
  CHECK(share == Approx(0.5 / (0.5 + 0.386)).epsilon(0.04));
}

TEST_CASE("few turns do not make noise look synchronous") {
  // 14 blocks leave 1/14 of the noise in the mean: 5 % of the share where it is not taken off. 200 cases, the mean is
  // known to 0.6 %.
  double share = 0.0;
  constexpr int cases = 200;
  for (std::uint64_t c = 0; c < cases; ++c) {
    const numeric::Random random(18);
    const auto average = averaged(running(0.65, [&](double t) {
      return std::cos(2.0 * pi * turns_at(t)) + random.normal(c, static_cast<std::uint32_t>(std::lround(t * rate)));
    }));
    share += *average.synchronous_share / cases;
  }
  CHECK(share == Approx(0.5 / (0.5 + 0.386)).epsilon(0.025));
}

TEST_CASE("blocks of several turns hold fractional orders with their phase from the first pulse") {
  rotation::SynchronousSettings settings;
  settings.average.turns_per_block = 4;
  const auto average = averaged(
      running(30.0, [](double t) { return std::cos(2.0 * pi * 0.75 * turns_at(t) - 100.0 * pi / 180.0); }), settings);
  const auto& line = at_order(average, 0.75);
  CHECK(line.amplitude_rms.value == Approx(1.0 / std::numbers::sqrt2).epsilon(2e-3));
  CHECK(average.waveform.size() == 256);
  // The first pulse is at the start of the recording or one turn later: the lag differs by 0.75 x 360 degrees a turn.
  bool is_found = false;
  for (int turn = 0; turn < 4; ++turn) is_found |= distance_deg(line.phase_lag_deg + 270.0 * turn, 100.0) < 1.0;
  CHECK(is_found);
}

TEST_CASE("orders agree with the tracks of a steady run") {
  const auto reader = running(20.0, synchronous);
  const auto answer = rotation::synchronous_average(reader, {}, {});
  REQUIRE(answer);
  rotation::OrderOptions options;
  options.orders = {1.0, 2.0};
  const auto tracks = rotation::order_tracks(reader, all_frames(reader), answer->speed, options, {});
  for (const auto& track : tracks) {
    const auto& line = at_order(answer->channels.front(), track.order);
    const auto middle = track.value.size() / 2;
    CHECK(std::abs(track.value[middle] - line.value) < 5e-3 * std::abs(line.value));
  }
}

TEST_CASE("a missing sample costs the channel the turns that rest on it") {
  auto samples = sampled(rate, 10.0, synchronous);
  const auto marks = sampled(rate, 10.0, mark);
  const MemoryReader whole(rate, {{"a", samples}, {"mark", marks, base::Quantity::pulse, recording::Role::tacho}});
  const MemoryReader holed(rate, {{"a", tests::without(samples, {20000, 20002})},
                                  {"mark", marks, base::Quantity::pulse, recording::Role::tacho}});
  const auto lost = averaged(whole).blocks - averaged(holed).blocks;
  CHECK(lost >= 1);
  CHECK(lost <= 3);
  CHECK(averaged(holed).lines[0].amplitude_rms.value == Approx(2.0 / std::numbers::sqrt2).epsilon(1e-3));
}

TEST_CASE("one and three threads give the same bits of a synchronous average") {
  const auto reader = running(40.0, synchronous);
  const auto a = averaged(reader, {}, 1);
  const auto b = averaged(reader, {}, 3);
  CHECK(a.waveform == b.waveform);
  CHECK(a.deviation == b.deviation);
  REQUIRE(a.lines.size() == b.lines.size());
  for (std::size_t k = 0; k < a.lines.size(); ++k) {
    CHECK(a.lines[k].value == b.lines[k].value);
    CHECK(*a.lines[k].amplitude_rms.u == *b.lines[k].amplitude_rms.u);
  }
}

TEST_CASE("without a tacho, or with too few turns, there is no synchronous average and the refusal says what to do") {
  const MemoryReader deaf(rate, {{"a", sampled(rate, 2.0, synchronous)}});
  CHECK(rotation::synchronous_average(deaf, {}, {}).refusal().code == "no-tacho");
  const auto brief = running(0.2, synchronous);
  const auto answer = rotation::synchronous_average(brief, {}, {});
  REQUIRE_FALSE(answer);
  CHECK(answer.refusal().code == "too-few-turns");
  CHECK_FALSE(answer.refusal().measure.empty());
  rotation::SynchronousSettings settings;
  settings.average.turns_per_block = 0;
  CHECK_THROWS_AS(rotation::synchronous_average(running(2.0, synchronous), settings, {}), base::Error);
  settings.average.turns_per_block = 1;
  settings.average.channels = {7};
  CHECK_THROWS_AS(rotation::synchronous_average(running(2.0, synchronous), settings, {}), base::Error);
}

TEST_CASE("lines that pass the usable part of the rate are left out") {
  rotation::SynchronousSettings settings;
  settings.average.highest_order = 100.0;
  const auto average = averaged(running(5.0, synchronous), settings);
  CHECK(average.lines.back().order * 25.0 < 0.4 * rate);
  CHECK(average.lines.back().order > 60.0);
}
