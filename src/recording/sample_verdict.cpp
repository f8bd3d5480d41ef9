#include "recording/sample_verdict.hpp"

#include <algorithm>
#include <cmath>

#include <fmt/format.h>

#include "stillmass/base/number.hpp"

namespace stillmass::recording {
namespace {

using base::Code;

class Judge {
 public:
  Judge(const Recording& recording, const Channel& channel, ChannelSamples samples)
      : recording_(recording), channel_(channel), samples_(std::move(samples)) {
    samples_.runs.close();
    step_ = channel.stored_step.value_or(samples_.smallest_change_seen);
    span_ = samples_.moments.largest - samples_.moments.least;
  }

  ChannelQuality judge() {
    quality_.channel = channel_.name;
    quality_.samples = samples_.moments.count;
    quality_.missing = samples_.missing;
    look_for_missing();
    if (quality_.samples == 0) {
      report(Code::no_signal, "no sample of the channel can be used", {}, {});
      return quality_;
    }
    take_numbers();
    if (is_dead()) return quality_;
    quality_.looks_like_pulses = samples_.levels.has_two_levels();
    if (channel_.role == Role::tacho || !is_vibration_or_force()) return quality_;
    look_for_clipping();
    look_for_few_bits();
    if (channel_.role == Role::force) return quality_;
    look_for_dropouts();
    look_for_flat_lines();
    look_for_spikes();
    look_for_shift();
    return quality_;
  }

 private:
  base::Finding& report(Code code, std::string text, std::optional<std::int64_t> first,
                        std::optional<std::int64_t> end) {
    base::Finding& finding = quality_.findings.emplace_back(base::Finding{code, std::move(text), channel_.name});
    if (first) finding.from_s = recording_.time_s(*first);
    if (end) finding.to_s = recording_.time_s(*end - 1) + 1.0 / recording_.rate_hz;
    return finding;
  }

  std::string with_unit(double value) const {
    return fmt::format("{} {}", base::rounded(value / channel_.unit.to_si), channel_.unit.name);
  }

  static std::string counted(std::int64_t count, const char* thing) {
    return fmt::format("{} {}{}", count, thing, count == 1 ? "" : "s");
  }

  void take_numbers() {
    const Moments& moments = samples_.moments;
    quality_.mean = moments.mean;
    quality_.rms = moments.rms();
    quality_.peak = std::max(moments.largest - moments.mean, moments.mean - moments.least);
    if (*quality_.rms > 0.0) quality_.crest_factor = *quality_.peak / *quality_.rms;
  }

  // Of a text file the reader has already told which cells are missing.
  void look_for_missing() {
    const bool told = std::any_of(recording_.findings.begin(), recording_.findings.end(), [&](const base::Finding& f) {
      return f.channel == channel_.name && (f.code == Code::missing_values || f.code == Code::not_a_number);
    });
    if (samples_.missing == 0 || told) return;
    report(Code::not_a_number,
           counted(samples_.missing, "sample") +
               (samples_.missing == 1 ? " that is not a number" : " that are not numbers"),
           samples_.first_missing, samples_.last_missing + 1);
  }

  // A column of speeds or temperatures beside the vibration is no signal to be judged.
  bool is_vibration_or_force() const {
    switch (channel_.unit.quantity) {
      case base::Quantity::acceleration:
      case base::Quantity::velocity:
      case base::Quantity::displacement:
      case base::Quantity::force:
      case base::Quantity::voltage:
      case base::Quantity::ratio:
        return true;
      default:
        return false;
    }
  }

  bool is_dead() {
    const double dead = channel_.stored_step ? quality_limit::dead_steps * *channel_.stored_step : 0.0;
    if (span_ > dead * (1.0 + 1e-9)) return false;
    report(Code::no_signal,
           span_ == 0.0
               ? "every sample is the same"
               : fmt::format("the signal moves by {:.0f} steps of the recorder", span_ / *channel_.stored_step),
           {}, {});
    return true;
  }

  // Without a change between neighbours nobody knows the step.
  bool few_steps() const { return std::isfinite(step_) && span_ < quality_limit::few_steps * step_; }

  void look_for_few_bits() {
    if (!few_steps()) return;
    report(Code::few_bits, fmt::format("the signal spans {:.0f} steps of {}", span_ / step_, with_unit(step_)), {}, {});
  }

  bool abrupt(double beside, double value) const {
    return std::abs(beside - value) > quality_limit::clipped_entry_steps * step_;
  }

  // A flat top that is not the rounded top of a slow signal: the signal jumps into it and out of it.
  bool cut_off(const Run& run) const {
    const bool in = std::isnan(run.before) || abrupt(run.before, run.value);
    const bool out = std::isnan(run.after) || abrupt(run.after, run.value);
    return in && out;
  }

  void look_for_clipping() {
    if (samples_.at_limit >= quality_limit::clipped_run) {
      report(Code::clipped, counted(samples_.at_limit, "sample") + " at the end of the range", samples_.first_at_limit,
             samples_.last_at_limit + 1);
      return;
    }
    if (few_steps()) return;
    if (!look_for_flat_tops(samples_.runs.tops(), samples_.moments.largest)) look_for_noisy_top(+1);
    if (!look_for_flat_tops(samples_.runs.bottoms(), samples_.moments.least)) look_for_noisy_top(-1);
  }

  // A flat top with the recorder's noise on it, so that its samples are not quite equal.
  void look_for_noisy_top(int sign) {
    if (quality_.looks_like_pulses) return;
    const auto top = samples_.levels.flat_top(sign, step_);
    if (!top) return;
    report(Code::overload,
           fmt::format("the signal stands still near {}, its {} value: {} crowd there and hardly any just {}",
                       with_unit(top->level), sign > 0 ? "largest" : "least", counted(top->samples, "sample"),
                       sign > 0 ? "below" : "above"),
           top->frames.begin, top->frames.end);
  }

  bool look_for_flat_tops(const FlatTops& tops, double extreme) {
    constexpr std::int64_t enough_tops = 2;
    constexpr std::int64_t enough_samples = 8;  // in a single flat top
    if (tops.list.runs == 0 || tops.sign * tops.value != extreme) return false;
    if (tops.list.runs < enough_tops && tops.list.longest < enough_samples) return false;
    const auto& runs = tops.list.first;
    const auto cut = std::count_if(runs.begin(), runs.end(), [&](const Run& run) { return cut_off(run); });
    if (2 * cut <= std::ssize(runs)) return false;
    report(Code::overload,
           fmt::format("{} at {}, {} in all", counted(tops.list.runs, "flat top"), with_unit(extreme),
                       counted(tops.list.samples, "sample")),
           runs.front().begin, tops.list.end);
    return true;
  }

  // Zeros that the signal jumps into, and out of again unless they last to the end.
  bool dropped(const Run& run) const {
    const double about_zero = std::hypot(*quality_.rms, *quality_.mean - channel_.offset);
    if (run.value != channel_.offset || std::isnan(run.before) || !abrupt(run.before, run.value)) return false;
    if (!std::isnan(run.after) && !abrupt(run.after, run.value)) return false;
    double edge = std::abs(run.before - run.value);
    if (!std::isnan(run.after)) edge = std::max(edge, std::abs(run.after - run.value));
    return edge > quality_limit::dropout_edge * about_zero;
  }

  void look_for_dropouts() {
    std::vector<Run> found;
    for (const Run& run : samples_.runs.zeros().first) {
      if (dropped(run)) found.push_back(run);
    }
    if (found.empty()) {
      look_for_quiet_gaps();
      return;
    }
    std::int64_t samples = 0;
    for (const Run& run : found) samples += run.length();
    auto& finding = report(Code::dropout,
                           fmt::format("the signal is exactly zero in {}, {} in all",
                                       counted(std::ssize(found), "place"), counted(samples, "sample")),
                           found.front().begin, found.back().end);
    list_places(found, finding);
  }

  // A loose contact before an amplifier leaves its noise, not zeros.
  void look_for_quiet_gaps() {
    if (few_steps()) return;
    std::vector<Run> found;
    for (const FrameRange& gap : samples_.windows.gaps()) {
      const auto& flats = samples_.runs.flats().first;
      const bool is_flat = std::any_of(flats.begin(), flats.end(), [&](const Run& run) {
        return run.begin < gap.end && gap.begin < run.end;  // told as a flat line
      });
      if (!is_flat) found.push_back({gap.begin, gap.end, 0, 0.0});
    }
    if (found.empty()) return;
    auto& finding = report(Code::dropout,
                           fmt::format("a steady signal falls to less than {:.0f} % of its usual swing in {}",
                                       100.0 * quality_limit::quiet_share, counted(std::ssize(found), "place")),
                           found.front().begin, found.back().end);
    finding.strength = base::Strength::fair;
    list_places(found, finding);
  }

  void look_for_flat_lines() {
    if (few_steps()) return;
    std::vector<Run> found;
    for (const Run& run : samples_.runs.flats().first) {
      if (dropped(run)) continue;
      const bool entered = std::isnan(run.before) ? run.value != channel_.offset : abrupt(run.before, run.value);
      if (entered) found.push_back(run);
    }
    if (found.empty()) return;
    auto& finding = report(Code::flat_line,
                           fmt::format("the signal stands still in {}, at {} first",
                                       counted(std::ssize(found), "place"), with_unit(found.front().value)),
                           found.front().begin, found.back().end);
    list_places(found, finding);
  }

  void list_places(const std::vector<Run>& runs, base::Finding& finding) const {
    constexpr std::size_t listed = 10;
    for (std::size_t i = 0; i < std::min(listed, runs.size()); ++i) {
      finding.evidence.push_back(fmt::format("{} s to {} s", base::rounded(recording_.time_s(runs[i].begin), 6),
                                             base::rounded(recording_.time_s(runs[i].end - 1), 6)));
    }
  }

  void look_for_spikes() {
    std::vector<Spike> found;
    for (const Spike& spike : samples_.spikes.largest) {
      if (spike.distance > quality_limit::spike_rms * *quality_.rms) found.push_back(spike);
    }
    if (found.empty()) {
      look_for_bursts();
      return;
    }
    const double largest = found.front().distance;
    std::sort(found.begin(), found.end(), [](const Spike& a, const Spike& b) { return a.frame < b.frame; });
    report(
        Code::spikes,
        fmt::format("{}{} far off their neighbours, by {} at most", found.size() == SpikeList::kept ? "at least " : "",
                    counted(std::ssize(found), "single sample"), with_unit(largest)),
        found.front().frame, found.back().frame + 1);
  }

  // Interference that the recorder's filter has made longer than one sample.
  void look_for_bursts() {
    if (few_steps() || quality_.looks_like_pulses) return;
    std::vector<Run> found;
    for (const FrameRange& burst : samples_.windows.bursts()) found.push_back({burst.begin, burst.end, 0, 0.0});
    if (found.empty()) return;
    auto& finding =
        report(Code::spikes,
               fmt::format("{} far above the swing of the steady signal", counted(std::ssize(found), "short burst")),
               found.front().begin, found.back().end);
    finding.strength = base::Strength::fair;
    list_places(found, finding);
  }

  void look_for_shift() {
    const auto shift = samples_.slow_mean.shift();
    if (!shift || few_steps() || quality_.looks_like_pulses) return;
    const char* const what = shift->kind == SlowMean::Shift::Kind::settles  ? "settles"
                             : shift->kind == SlowMean::Shift::Kind::drifts ? "drifts"
                                                                            : "jumps";
    report(Code::drift, fmt::format("the mean {} by {}", what, with_unit(shift->amount)), shift->frames.begin,
           shift->frames.end)
        .strength = base::Strength::fair;
  }

  const Recording& recording_;
  const Channel& channel_;
  ChannelSamples samples_;
  ChannelQuality quality_;
  double step_ = 0.0;  // least step of the samples
  double span_ = 0.0;  // peak to peak
};

}  // namespace

ChannelQuality judge_channel(const Recording& recording, const Channel& channel, ChannelSamples samples) {
  return Judge(recording, channel, std::move(samples)).judge();
}

}  // namespace stillmass::recording
