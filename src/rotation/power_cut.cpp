#include "stillmass/rotation/power_cut.hpp"

#include <algorithm>
#include <array>
#include <cmath>
#include <numbers>
#include <span>

#include <fmt/format.h>

#include "stillmass/base/error.hpp"

#include "rotation/base_band.hpp"
#include "rotation/coast_knee.hpp"
#include "rotation/line_speed.hpp"
#include "rotation/stream_windows.hpp"

namespace stillmass::rotation {
namespace {

using base::Interval;
using recording::FrameRange;
using recording::Recording;
using std::numbers::pi;

constexpr double search = 0.003;           // of the electrical frequency, either way: a public grid stays well inside
constexpr double stands_out = 4.0;         // times the noise beside it (common practice)
constexpr double vanished = 0.25;          // of before
constexpr double went_on = 0.5;            // of before
constexpr double swelled = 2.0;            // times before: another order sweeps across, or a resonance is passed
constexpr double came_down = 0.9;          // of the speed: so far a line without a tacho must be followed
constexpr std::size_t last_readings = 12;  // before the cut: three windows
constexpr double before_most_s = 10.0;
constexpr double after_most_s = 5.0;
constexpr double aside_lobes = 1.5;  // where the noise is read: so many widths of the lobe away
constexpr double step_search = 1.5;  // windows around where the speed begins to fall

base::Estimate estimate(double value, std::optional<double> u, base::Quantity quantity) {
  base::Estimate out;
  out.value = value;
  out.u = u;
  out.quantity = quantity;
  return out;
}

// The longest part of the wanted time without a gap.
FrameRange part_of(const Recording& recording, const std::optional<Interval>& time_s) {
  FrameRange wanted{0, recording.frames};
  if (time_s) wanted = {recording.frame_at(time_s->lo), recording.frame_at(time_s->hi)};
  FrameRange best{0, 0};
  for (const recording::Segment& segment : recording.segments) {
    const FrameRange part{std::max(wanted.begin, segment.first_frame),
                          std::min(wanted.end, segment.first_frame + segment.frames)};
    if (part.size() > best.size()) best = part;
  }
  return best;
}

// Where two levels describe the amplitudes best: the place of the first of the second level.
std::size_t step_in(std::span<const double> values) {
  double all = 0.0;
  for (const double value : values) all += value;
  double before = 0.0;
  double best = -1.0;
  std::size_t at = 1;
  const auto n = static_cast<double>(values.size());
  for (std::size_t i = 1; i < values.size(); ++i) {
    before += values[i - 1];
    const auto k = static_cast<double>(i);
    const double fall = before / k - (all - before) / (n - k);
    const double explained = fall > 0.0 ? fall * fall * k * (n - k) / n : 0.0;
    if (explained > best) {
      best = explained;
      at = i;
    }
  }
  return at;
}

base::Refusal no_cut(std::string seen) {
  return {"no-power-cut", std::move(seen),
          "record from ten seconds before the machine is switched off until it stands still"};
}

// A line before the cut.
struct Steady {
  double frequency_hz = 0.0;
  double rms = 0.0;
  double resolution_hz = 0.0;
};

class Test {
 public:
  Test(const recording::Reader& reader, const PowerCutOptions& options, const SpeedCurve& curve, FrameRange range,
       const base::Context& context)
      : reader_(reader),
        recording_(reader.recording()),
        options_(options),
        curve_(curve),
        range_(range),
        context_(context),
        length_(static_cast<std::size_t>(std::max(16.0, std::round(options.block_s * recording_.rate_hz)))),
        window_(length_, recording_.rate_hz),
        quantity_(recording_.channels[options.channel].unit.quantity) {}

  base::Answer<PowerCut> answer() {
    const Interval time{recording_.time_s(range_.begin), recording_.time_s(range_.end - 1)};
    const auto knee = knee_of(curve_, time);
    if (!knee) return no_cut("the speed does not fall in this part of the recording");
    knee_ = *knee;
    read_fixed();
    const auto first_after = std::find_if(readings_.begin(), readings_.end(), [&](const Reading& each) {
      return each.time_s > knee_.time_s - options_.block_s;
    });
    const std::span<const Reading> before(readings_.begin(), first_after);
    if (before.size() < 9 || readings_.end() - first_after < 17) {
      return no_cut(
          fmt::format("the power was cut at {:.2f} s, and there is too little before or after it", knee_.time_s));
    }
    const double grid = search * options_.electrical_hz;
    const SteadyLine line = strongest(before, {-grid, grid}, window_.lobe_hz(), [](double) { return false; });
    line_ = {options_.electrical_hz + line.off_hz, line.rms, line.resolution_hz};
    order_ = line_.frequency_hz / mean_speed(before);
    neighbour_ = neighbour(before);
    std::vector<double> beside;
    for (const Reading& each : before) beside.push_back(each.beside);
    noise_before_ = middle_of(std::move(beside));
    std::vector<double> last;
    for (const Reading& each : before.last(std::min(before.size(), last_readings))) last.push_back(std::abs(each.at));
    last_rms_ = middle_of(std::move(last));
    locate();
    read_order();
    describe();
    decide();
    return std::move(out_);
  }

 private:
  double middle(std::int64_t first) const {
    return recording_.time_s(first) + 0.5 * static_cast<double>(length_) / recording_.rate_hz;
  }

  FrameRange around(double before_s, double after_s) const {
    return {std::max(range_.begin, recording_.frame_at(knee_.time_s - before_s)),
            std::min(range_.end, recording_.frame_at(knee_.time_s + after_s))};
  }

  void read_fixed() {
    const double aside = aside_lobes * window_.lobe_hz();
    const double f = options_.electrical_hz;
    stream_windows(reader_, options_.channel, around(before_most_s, after_most_s), length_,
                   std::max<std::size_t>(1, length_ / 4), context_,
                   [&](std::int64_t first, std::span<const double> samples) {
                     const double start = recording_.time_s(first);
                     const double above = std::abs(window_.at(samples, f + aside, start));
                     const double below = f > aside ? std::abs(window_.at(samples, f - aside, start)) : above;
                     readings_.push_back({middle(first), window_.at(samples, f, start), std::min(above, below)});
                     return true;
                   });
  }

  double mean_speed(std::span<const Reading> before) const {
    const Interval known = curve_.time_s();
    const double from = curve_.turn_at(std::clamp(before.front().time_s, known.lo, known.hi));
    const double to = curve_.turn_at(std::clamp(before.back().time_s, known.lo, known.hi));
    return to - from < 1.0 ? knee_.speed_hz : curve_.mean_speed(from, to).value;
  }

  // The whole order of the speed that stands nearest the line, apart from it, inside the window's lobe.
  Steady neighbour(std::span<const Reading> before) const {
    const double nearest = std::round(order_) * line_.frequency_hz / order_;
    const double off = nearest - options_.electrical_hz;
    const double reach = 2.0 * line_.resolution_hz + 0.002 * nearest;
    const double lobe = window_.lobe_hz();
    if (std::abs(off) + reach > 0.8 * lobe || std::abs(nearest - line_.frequency_hz) < 2.0 * line_.resolution_hz) {
      return {};
    }
    const double own = line_.frequency_hz - options_.electrical_hz;
    const SteadyLine out = strongest(before, {off - reach, off + reach}, lobe,
                                     [&](double each) { return std::abs(each - own) < 2.0 * line_.resolution_hz; });
    return {nearest, out.rms, out.resolution_hz};
  }

  // The best step from more than half of the line's height to less, near where the speed begins to fall; without one
  // (another order may sweep across) where the speed begins to fall.
  void locate() {
    const double reach = step_search * options_.block_s;
    std::vector<double> near;
    std::size_t first = readings_.size();
    for (std::size_t i = 0; i < readings_.size(); ++i) {
      if (readings_[i].time_s < knee_.time_s - reach || readings_[i].time_s > knee_.fallen_s + reach) continue;
      first = std::min(first, i);
      near.push_back(std::abs(readings_[i].at));
    }
    fell_s_ = knee_.time_s;
    if (near.size() < 4) return;
    const std::size_t step = step_in(near);
    const auto middle = near.begin() + static_cast<std::ptrdiff_t>(step);
    clean_step_ = middle_of({near.begin(), middle}) > went_on * line_.rms &&
                  middle_of({middle, near.end()}) < went_on * line_.rms;
    if (clean_step_) fell_s_ = 0.5 * (readings_[first + step - 1].time_s + readings_[first + step].time_s);
  }

  void read_order() {
    const Interval known = curve_.time_s();
    const double reach = 0.5 * options_.block_s;
    stream_windows(
        reader_, options_.channel, around(3.0, after_most_s), length_, std::max<std::size_t>(1, length_ / 4), context_,
        [&](std::int64_t first, std::span<const double> samples) {
          const double time = middle(first);
          if (time - reach < known.lo) return true;
          if (time + reach > known.hi) return false;
          const auto fixed =
              std::min_element(readings_.begin(), readings_.end(), [&](const Reading& a, const Reading& b) {
                return std::abs(a.time_s - time) < std::abs(b.time_s - time);
              });
          out_.track.time_s.push_back(time);
          out_.track.at_frequency.push_back(std::abs(fixed->at));
          out_.track.at_order.push_back(std::abs(window_.along(samples, curve_, order_, recording_.time_s(first))));
          out_.track.speed_hz.push_back(speed_at(time));
          return true;
        });
  }

  double speed_at(double time_s) const {
    return turn_speed(curve_, curve_.turn_at(std::clamp(time_s, curve_.time_s().lo, curve_.time_s().hi)));
  }

  // From 90 % to 10 % of the fall between two levels, by straight lines, about a clean step; otherwise from where the
  // speed begins to fall to the first reading that is low, which the fall did not take longer than.
  base::Estimate fall_time(double high, double low) const {
    const auto crossing = [&](double share) -> std::optional<double> {
      const double level = low + share * (high - low);
      std::optional<double> found;
      for (std::size_t i = 1; i < readings_.size(); ++i) {
        const Reading& from = readings_[i - 1];
        const Reading& to = readings_[i];
        if (std::abs(to.time_s - fell_s_) > 2.0 * step_search * options_.block_s) continue;
        const double a = std::abs(from.at);
        const double b = std::abs(to.at);
        if (!(a > level && b <= level)) continue;
        const double time = from.time_s + (a - level) / (a - b) * (to.time_s - from.time_s);
        if (!found || std::abs(time - fell_s_) < std::abs(*found - fell_s_)) found = time;
      }
      return found;
    };
    const auto begin = crossing(0.9);
    const auto end = crossing(0.1);
    if (clean_step_ && begin && end && *end > *begin) {
      return estimate(*end - *begin, 0.25 * options_.block_s / std::numbers::sqrt3, base::Quantity::time);
    }
    for (const Reading& each : readings_) {
      if (each.time_s > fell_s_ && std::abs(each.at) < std::max(vanished * high, 2.0 * out_.noise_rms)) {
        return estimate(each.time_s - fell_s_, {}, base::Quantity::time);
      }
    }
    return estimate(readings_.back().time_s - fell_s_, {}, base::Quantity::time);
  }

  void describe() {
    const double hop_s = 0.25 * options_.block_s;
    std::vector<double> level;
    std::vector<double> beside;
    for (const Reading& each : readings_) {
      const double late = each.time_s - fell_s_;
      if (late < options_.block_s || late > options_.block_s + 1.0) continue;
      level.push_back(std::abs(each.at));
      beside.push_back(each.beside);
    }
    std::vector<double> followed;
    const double ended = std::max(fell_s_ + 0.75 * options_.block_s, knee_.fallen_s + 0.5 * options_.block_s);
    for (std::size_t i = 0; i < out_.track.time_s.size(); ++i) {
      const double late = out_.track.time_s[i] - ended;
      if (late >= 0.0 && late <= 0.75 * options_.block_s) {
        followed.push_back(out_.track.at_order[i]);
        followed_speed_hz_ = out_.track.speed_hz[i];
      }
    }
    has_followed_ = !followed.empty();
    out_.noise_rms = middle_of(beside);
    const double noise_u = out_.noise_rms / std::numbers::sqrt2;
    out_.frequency = estimate(line_.frequency_hz, line_.resolution_hz * noise_before_ / std::max(line_.rms, 1e-300),
                              base::Quantity::frequency);
    out_.before_rms = estimate(line_.rms, noise_before_ / std::numbers::sqrt2, quantity_);
    out_.after_rms = estimate(middle_of(level), noise_u, quantity_);
    out_.followed_rms = estimate(middle_of(followed), noise_u, quantity_);
    out_.cut_s = estimate(fell_s_, hop_s / std::numbers::sqrt3, base::Quantity::time);
    out_.fall_s = fall_time(line_.rms, std::min(out_.after_rms.value, 0.8 * line_.rms));
    out_.speed_before_hz = knee_.speed_hz;
    out_.speed_after_fall_hz = speed_at(fell_s_ + (clean_step_ ? 0.5 : 1.0) * out_.fall_s.value);
  }

  void decide() {
    const double before = out_.before_rms.value;
    const double followed = out_.followed_rms.value;
    const double slower = followed_speed_hz_ > 0.0 ? knee_.speed_hz / followed_speed_hz_ : 1.0;
    const std::string line = fmt::format("the line at {:.2f} Hz", line_.frequency_hz);
    if (before < stands_out * noise_before_) {
      cannot_tell(fmt::format("no line stands out at {:.2f} Hz before the power was cut", options_.electrical_hz));
    } else if (last_rms_ < went_on * before) {
      cannot_tell(line + " had gone before the speed began to fall: the two do not belong together");
    } else if (neighbour_.rms > went_on * before) {
      cannot_tell(fmt::format("{:.0f}x of the speed ({:.2f} Hz) stands beside {} and is {:.2g} times as strong",
                              std::round(order_), neighbour_.frequency_hz, line, neighbour_.rms / before));
    } else if (!has_followed_) {
      cannot_tell("the speed is not known after the power was cut");
    } else if (followed < std::max(vanished * before, 2.0 * out_.noise_rms) && followed < went_on * before &&
               out_.after_rms.value < went_on * before) {
      out_.verdict = PowerCutVerdict::electrical;
      out_.reason = fmt::format(
          "{} fell to {:.0f} % within {:.2f} s, while the speed fell by {:.1f} %; at its order {:.0f} % went on", line,
          100.0 * out_.after_rms.value / before, out_.fall_s.value,
          100.0 * (1.0 - out_.speed_after_fall_hz / knee_.speed_hz), 100.0 * followed / before);
    } else if (followed > swelled * before) {
      cannot_tell(fmt::format("{:.1f} times {} stands at its order after the cut: something else sweeps across",
                              followed / before, line));
    } else if (followed * slower * slower > went_on * before && followed > stands_out * out_.noise_rms) {
      out_.verdict = PowerCutVerdict::mechanical;
      out_.reason =
          fmt::format("{} went on at {:.3f} times the speed as that fell: {:.0f} % of it at {:.0f} % of the speed",
                      line, order_, 100.0 * followed / before, 100.0 / slower);
    } else {
      cannot_tell(fmt::format("{:.0f} % of {} went on at its order: neither all of it nor nothing",
                              100.0 * followed / before, line));
    }
  }

  void cannot_tell(std::string reason) {
    out_.verdict = PowerCutVerdict::cannot_tell;
    out_.cut_s = estimate(knee_.time_s, 0.25 * options_.block_s, base::Quantity::time);
    out_.reason = std::move(reason);
  }

  const recording::Reader& reader_;
  const Recording& recording_;
  const PowerCutOptions& options_;
  const SpeedCurve& curve_;
  FrameRange range_;
  const base::Context& context_;
  std::size_t length_;
  HannWindow window_;
  base::Quantity quantity_;
  Knee knee_;
  std::vector<Reading> readings_;
  Steady line_;
  Steady neighbour_;
  double order_ = 0.0;
  double noise_before_ = 0.0;
  double last_rms_ = 0.0;
  double fell_s_ = 0.0;
  double followed_speed_hz_ = 0.0;
  bool has_followed_ = false;
  bool clean_step_ = false;
  PowerCut out_;
};

}  // namespace

std::string_view name(PowerCutVerdict verdict) {
  constexpr std::array<std::string_view, 3> names = {"electrical", "mechanical", "cannot tell"};
  return names[static_cast<std::size_t>(verdict)];
}

base::Answer<PowerCut> power_cut(const recording::Reader& reader, const PowerCutOptions& options,
                                 const SpeedCurve* curve, const base::Context& context) {
  const Recording& recording = reader.recording();
  if (options.channel >= recording.channels.size()) {
    throw base::usage_error("power cut", fmt::format("there is no channel {}", options.channel + 1));
  }
  if (!(options.electrical_hz > 0.0) || options.electrical_hz > 0.4 * recording.rate_hz) {
    throw base::usage_error("power cut",
                            fmt::format("{} Hz is outside 0 to {} Hz", options.electrical_hz, 0.4 * recording.rate_hz));
  }
  if (!(options.block_s > 0.0)) throw base::usage_error("power cut", "the window must be longer than 0 s");
  const FrameRange range = part_of(recording, options.time_s);
  if (curve != nullptr) return Test(reader, options, *curve, range, context).answer();
  if (!options.speed_hz) {
    return base::Refusal{"no-tacho", "neither a tacho nor a speed says how fast the machine turns",
                         "record a tacho, or say the speed before the power was cut"};
  }
  const auto pulses = pulses_of_line(reader, options.channel, range, *options.speed_hz, options.block_s, context);
  if (!pulses) return pulses.refusal();
  const SpeedCurve followed(*pulses);
  // A structure that rings on near 1x looks like a rotor that keeps its speed: only a line seen to come down counts.
  const double last = turn_speed(followed, followed.turns().hi);
  if (last > came_down * *options.speed_hz && last > 0.0) {
    const bool to_the_end = followed.time_s().hi > recording.time_s(range.end - 1) - 2.0 * options.block_s - 4.0 / last;
    if (to_the_end) return no_cut("the speed does not fall in this part of the recording");
    return base::Refusal{"no-tacho",
                         fmt::format("the line at {:.2f} Hz is lost at {:.2f} Hz, {:.2f} s", *options.speed_hz, last,
                                     followed.time_s().hi),
                         "record a tacho"};
  }
  return Test(reader, options, followed, range, context).answer();
}

}  // namespace stillmass::rotation
