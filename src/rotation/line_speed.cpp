#include "rotation/line_speed.hpp"

#include <cmath>
#include <complex>
#include <numbers>

#include <fmt/format.h>

#include "rotation/stream_windows.hpp"

namespace stillmass::rotation {
namespace {

using Complex = std::complex<double>;
using std::numbers::pi;

constexpr double drowned = 3.0;    // times what stands beside the line (common practice)
constexpr double fastest = 1.03;   // times the speed said: beyond, something else is followed
constexpr std::size_t least = 10;  // turns

// Follows one line from window to window.
class LineFollower {
 public:
  LineFollower(double frequency_hz, double rate_hz, std::size_t length, std::size_t hop)
      : rate_hz_(rate_hz),
        hop_s_(static_cast<double>(hop) / rate_hz),
        said_hz_(frequency_hz),
        frequency_hz_(frequency_hz) {
    for (std::size_t i = 0; i < length; ++i) {
      hann_.push_back(0.5 - 0.5 * std::cos(2.0 * pi * static_cast<double>(i) / static_cast<double>(length)));
    }
  }

  // False where the line is lost. `time_s`: middle of the window.
  bool take(double time_s, std::span<const double> samples) {
    const Complex here = at(samples, frequency_hz_);
    const double aside = 3.0 * rate_hz_ / static_cast<double>(hann_.size());
    double beside = std::abs(at(samples, frequency_hz_ + aside));
    if (frequency_hz_ > 1.5 * aside) beside = std::min(beside, std::abs(at(samples, frequency_hz_ - aside)));
    if (std::abs(here) < drowned * beside) return false;
    // The phase moves between the halves of a window by the difference to the frequency it was read at.
    const std::size_t half = samples.size() / 2;
    const Complex early = half_at(samples, 0, half);
    const Complex late = half_at(samples, half, half);
    const double off = std::arg(late * std::conj(early)) / (2.0 * pi * static_cast<double>(half) / rate_hz_);
    const double found = frequency_hz_ + off;
    if (!(found > 0.0) || found > fastest * said_hz_) return false;
    if (times_.empty()) {
      turns_.push_back(0.0);
    } else {
      turns_.push_back(turns_.back() + 0.5 * (found + last_hz_) * (time_s - times_.back()));
      rate_ = 0.5 * rate_ + 0.5 * (found - last_hz_) / hop_s_;
    }
    times_.push_back(time_s);
    last_hz_ = found;
    frequency_hz_ = std::max(0.5, found + rate_ * hop_s_);
    return true;
  }

  // Whole turns, by a straight line between windows.
  Pulses pulses() const {
    Pulses out;
    double next = 0.0;
    for (std::size_t i = 1; i < times_.size(); ++i) {
      while (next <= turns_[i]) {
        const double part = (next - turns_[i - 1]) / (turns_[i] - turns_[i - 1]);
        out.time_s.push_back(times_[i - 1] + part * (times_[i] - times_[i - 1]));
        out.turns.push_back(next);
        next += 1.0;
      }
    }
    return out;
  }

 private:
  Complex at(std::span<const double> samples, double frequency_hz) const {
    Complex sum = 0.0;
    const Complex step = std::polar(1.0, -2.0 * pi * frequency_hz / rate_hz_);
    Complex turn = 1.0;
    for (std::size_t i = 0; i < samples.size(); ++i) {
      sum += hann_[i] * samples[i] * turn;
      turn *= step;
    }
    return sum;
  }

  // Of half a window under a Hann window of its own, the phase counted from the same instant.
  Complex half_at(std::span<const double> samples, std::size_t from, std::size_t count) const {
    Complex sum = 0.0;
    const Complex step = std::polar(1.0, -2.0 * pi * frequency_hz_ / rate_hz_);
    Complex turn = std::polar(1.0, -2.0 * pi * frequency_hz_ * static_cast<double>(from) / rate_hz_);
    for (std::size_t i = 0; i < count; ++i) {
      sum += hann_[2 * i] * samples[from + i] * turn;
      turn *= step;
    }
    return sum;
  }

  double rate_hz_;
  double hop_s_;
  double said_hz_;
  double frequency_hz_;
  double last_hz_ = 0.0;
  double rate_ = 0.0;
  std::vector<double> hann_;
  std::vector<double> times_;
  std::vector<double> turns_;
};

}  // namespace

base::Answer<Pulses> pulses_of_line(const recording::Reader& reader, std::size_t channel, recording::FrameRange range,
                                    double speed_hz, double window_s, const base::Context& context) {
  const recording::Recording& recording = reader.recording();
  // Four turns at least, and an even number of frames.
  const double length_s = std::max(window_s, 4.0 / speed_hz);
  const auto length = 2 * static_cast<std::size_t>(std::max(8.0, std::round(0.5 * length_s * recording.rate_hz)));
  const std::size_t hop = std::max<std::size_t>(1, length / 4);
  LineFollower follower(speed_hz, recording.rate_hz, length, hop);
  stream_windows(reader, channel, range, length, hop, context, [&](std::int64_t first, std::span<const double> x) {
    return follower.take(recording.time_s(first) + 0.5 * static_cast<double>(length) / recording.rate_hz, x);
  });
  Pulses out = follower.pulses();
  if (out.time_s.size() < least) {
    return base::Refusal{"no-tacho", fmt::format("the line at {:.2f} Hz cannot be followed", speed_hz),
                         "record a tacho, or say the speed more closely"};
  }
  return out;
}

}  // namespace stillmass::rotation
