#include "stillmass/machine/running_speed.hpp"

#include <algorithm>
#include <array>
#include <cmath>
#include <set>
#include <utility>

#include <fmt/format.h>

#include "machine/speed_fit.hpp"

namespace stillmass::machine {
namespace {

using base::Interval;

constexpr double tolerance = 0.03;                  // of a nominal speed
constexpr Interval motor_slip_range{0.92, 0.9995};  // speed over synchronous speed; above stands the line itself
constexpr double alike = 0.5;                       // 6 dB
constexpr double faintest = 0.05;                   // of the strongest line: weaker ones are not asked
constexpr std::size_t clear_lead = 2;               // orders more that put a weaker line before the strongest
constexpr double supported_alike = 0.8;             // of the best score
constexpr int blind_orders = 6;

// Frequencies of an induction motor on the line, with so many poles.
Interval slip_range(double line_frequency_hz, int poles) {
  const double synchronous = 2.0 * line_frequency_hz / poles;
  return {motor_slip_range.lo * synchronous, motor_slip_range.hi * synchronous};
}

std::optional<Interval> motor_range(const Machine& machine) {
  if (!machine.synchronous_hz()) return {};
  const Interval range = slip_range(*machine.line_frequency_hz, *machine.motor_poles);
  if (machine.speed_hz && !range.contains(machine.speed_hz->middle())) return {};
  return range;
}

base::Refusal unknown(std::string seen, std::string measure) {
  return {"speed-unknown", std::move(seen), std::move(measure)};
}

std::vector<int> orders_of(const Machine& machine) {
  std::set<int> orders = {1, 2, 3};
  if (machine.vanes && *machine.vanes > 1) orders.insert({*machine.vanes, 2 * *machine.vanes});
  return {orders.begin(), orders.end()};
}

// Peaks at the line frequency and its multiples, which are no harmonics of a motor that slips.
std::vector<bool> line_multiples(std::span<const Peak> peaks, const Machine& machine, double line_hz, bool slips) {
  std::vector<bool> out(peaks.size(), false);
  if (!slips || machine.supply != Supply::line || !machine.line_frequency_hz) return out;
  for (std::size_t i = 0; i < peaks.size(); ++i) {
    const double k = std::round(peaks[i].frequency.value / *machine.line_frequency_hz);
    const double off = std::abs(peaks[i].frequency.value - k * *machine.line_frequency_hz);
    out[i] = k >= 1.0 && off <= std::min(line_hz, 0.5 * (1.0 - motor_slip_range.hi) * peaks[i].frequency.value);
  }
  return out;
}

// Lines of several channels at one frequency.
struct Start {
  double frequency_hz = 0.0;  // of the strongest
  double amplitude = 0.0;     // summed
  double strongest = 0.0;
  std::size_t peak = 0;
};

// The lines in a range, strongest first.
std::vector<Start> starts(std::span<const Peak> peaks, Interval range, double line_hz,
                          const std::vector<bool>& left_out) {
  std::vector<std::size_t> inside;
  for (std::size_t i = 0; i < peaks.size(); ++i) {
    if (range.contains(peaks[i].frequency.value) && !left_out[i]) inside.push_back(i);
  }
  std::stable_sort(inside.begin(), inside.end(),
                   [&](std::size_t a, std::size_t b) { return peaks[a].frequency.value < peaks[b].frequency.value; });
  std::vector<Start> out;
  std::set<std::size_t> channels;
  double last = 0.0;
  for (const std::size_t i : inside) {
    const Peak& peak = peaks[i];
    const bool joins = !out.empty() && peak.frequency.value - last <= line_hz && channels.count(peak.channel) == 0;
    if (!joins) {
      out.emplace_back();
      channels.clear();
    }
    channels.insert(peak.channel);
    last = peak.frequency.value;
    Start& start = out.back();
    start.amplitude += peak.amplitude;
    if (!joins || peak.amplitude > start.strongest) {
      start.frequency_hz = peak.frequency.value;
      start.strongest = peak.amplitude;
      start.peak = i;
    }
  }
  std::stable_sort(out.begin(), out.end(), [](const Start& a, const Start& b) { return a.amplitude > b.amplitude; });
  return out;
}

base::Refusal nothing_there(Interval range) {
  return unknown(fmt::format("no line between {:.2f} and {:.2f} Hz, where the speed must be", range.lo, range.hi),
                 "record a tacho, or check the nominal speed");
}

base::Refusal two_alike(double first_hz, double second_hz) {
  return unknown(fmt::format("two lines alike where the speed must be: {:.2f} and {:.2f} Hz", first_hz, second_hz),
                 "record a tacho, or say the speed more closely");
}

// Of several starts the one that counts: the strongest, unless another as strong has more orders, or a weaker one
// clearly more.
base::Answer<RunningSpeed> chosen(std::vector<std::pair<Start, RunningSpeed>> all, Interval range) {
  const auto orders = [](const auto& each) { return orders_used(each.second); };
  std::size_t best = 0;
  for (std::size_t i = 1; i < all.size(); ++i) {
    const bool comparable = all[i].first.amplitude > alike * all[0].first.amplitude;
    const std::size_t lead = comparable ? 1 : clear_lead;
    if (orders(all[i]) >= orders(all[0]) + lead && orders(all[i]) > orders(all[best])) best = i;
  }
  for (std::size_t i = 0; i < all.size(); ++i) {
    const bool comparable = all[i].first.amplitude > alike * all[best].first.amplitude;
    if (i != best && comparable && orders(all[i]) >= orders(all[best])) {
      return two_alike(all[best].first.frequency_hz, all[i].first.frequency_hz);
    }
  }
  all[best].second.searched_hz = range;
  return std::move(all[best].second);
}

struct Supported {
  RunningSpeed speed;
  double score = 0.0;
};

// Share of the first multiples that stand in the lines, times the share of the power they hold; halved where the
// fundamental itself is not there.
double score_of(const RunningSpeed& speed, std::span<const Peak> peaks, const std::vector<bool>& left_out) {
  std::set<double> found;
  double held = 0.0;
  double all = 0.0;
  for (const SpeedLine& line : speed.lines) {
    if (!line.used) continue;
    if (line.order <= blind_orders) found.insert(line.order);
    held += peaks[line.peak].amplitude * peaks[line.peak].amplitude;
  }
  for (std::size_t i = 0; i < peaks.size(); ++i) {
    if (!left_out[i]) all += peaks[i].amplitude * peaks[i].amplitude;
  }
  const double share = static_cast<double>(found.size()) / blind_orders;
  return share * (all > 0.0 ? held / all : 0.0) * (found.count(1.0) != 0 ? 1.0 : 0.5);
}

bool could_be_motor(double speed_hz, double line_frequency_hz) {
  for (int poles = 2; poles <= 12; poles += 2) {
    if (slip_range(line_frequency_hz, poles).contains(speed_hz)) return true;
  }
  return false;
}

// Those of motors on the line alone, where the best of them is at least half as well supported as the best of all.
void prefer_motors(std::vector<Supported>& found, const Machine& machine) {
  if (machine.supply != Supply::line || !machine.line_frequency_hz) return;
  const auto is_motor = [&](const Supported& each) {
    return could_be_motor(each.speed.speed.value, *machine.line_frequency_hz);
  };
  const auto best = std::find_if(found.begin(), found.end(), is_motor);
  if (best == found.end() || best->score < 0.5 * found.front().score) return;
  std::erase_if(found, [&](const Supported& each) { return !is_motor(each); });
}

}  // namespace

std::optional<Interval> possible_speeds(const Machine& machine) {
  const auto motor = motor_range(machine);
  if (!machine.speed_hz) return motor;
  const Interval nominal = *machine.speed_hz;
  if (nominal.width() > 0.0) return nominal;
  Interval range{(1.0 - tolerance) * nominal.lo, (1.0 + tolerance) * nominal.hi};
  if (motor) range = {std::max(range.lo, motor->lo), std::min(range.hi, motor->hi)};
  return range;
}

base::Answer<RunningSpeed> running_speed(std::span<const Peak> peaks, const Machine& machine, double line_hz) {
  const auto range = possible_speeds(machine);
  if (!range) return unknown("the nominal speed is not known", "say the speed, or record a tacho");
  const std::vector<bool> left_out = line_multiples(peaks, machine, line_hz, motor_range(machine).has_value());
  const std::vector<int> orders = orders_of(machine);
  std::vector<std::pair<Start, RunningSpeed>> all;
  const std::vector<Start> at_first = starts(peaks, *range, line_hz, left_out);
  for (const Start& start : at_first) {
    if (start.amplitude < faintest * at_first.front().amplitude) break;
    if (auto fitted = fit_speed(peaks, orders, start.frequency_hz, line_hz, left_out)) {
      all.emplace_back(start, std::move(*fitted));
    }
  }
  for (const int order : orders) {  // no line at 1x itself: two others can stand in for it
    if (!all.empty() || order == 1) continue;
    for (Start start : starts(peaks, {order * range->lo, order * range->hi}, line_hz, left_out)) {
      start.frequency_hz /= order;
      auto fitted = fit_speed(peaks, orders, start.frequency_hz, line_hz / order, left_out);
      if (fitted && orders_used(*fitted) >= 2) all.emplace_back(start, std::move(*fitted));
    }
  }
  if (all.empty()) return nothing_there(*range);
  return chosen(std::move(all), *range);
}

base::Answer<RunningSpeed> running_speed(std::span<const Peak> peaks, const Machine& machine, double line_hz,
                                         std::span<const SpeedCandidate> candidates) {
  const auto range = possible_speeds(machine);
  if (range) {
    auto known = running_speed(peaks, machine, line_hz);
    if (known) return known;
  }
  const std::vector<bool> left_out = line_multiples(peaks, machine, line_hz, true);
  std::set<int> orders = {1, 2, 3, 4, 5, 6};
  for (const int order : orders_of(machine)) orders.insert(order);
  const std::vector<int> tried(orders.begin(), orders.end());
  std::vector<Supported> found;
  for (const SpeedCandidate& each : candidates) {
    if (each.count < 2 || (range && !range->contains(each.fundamental.value))) continue;
    auto speed = fit_speed(peaks, tried, each.fundamental.value, line_hz, left_out);
    if (!speed || orders_used(*speed) < 2) continue;
    const bool known = std::any_of(found.begin(), found.end(), [&](const Supported& other) {
      return std::abs(other.speed.speed.value - speed->speed.value) <= line_hz;
    });
    const double score = score_of(*speed, peaks, left_out);
    if (!known) found.push_back({std::move(*speed), score});
  }
  if (found.empty()) {
    return unknown(range ? "no family of harmonics where the speed must be"
                         : "the nominal speed is not known, and no two lines are multiples of one frequency",
                   "say the speed, or record a tacho");
  }
  std::stable_sort(found.begin(), found.end(), [](const auto& a, const auto& b) { return a.score > b.score; });
  prefer_motors(found, machine);
  if (found.size() > 1 && found[1].score > supported_alike * found[0].score) {
    return two_alike(found[0].speed.speed.value, found[1].speed.speed.value);
  }
  found[0].speed.searched_hz = range.value_or(Interval{found[0].speed.speed.value, found[0].speed.speed.value});
  return std::move(found[0].speed);
}

base::Answer<base::Estimate> running_speed(std::span<const Peak> peaks, const Machine& machine) {
  const auto range = possible_speeds(machine);
  if (!machine.speed_hz || !range) {
    return unknown("the nominal speed is not known", "say the speed, or record a tacho");
  }
  const std::vector<Start> found = starts(peaks, *range, 0.0, std::vector<bool>(peaks.size(), false));
  if (found.empty()) return nothing_there(*range);
  if (found.size() > 1 && found[1].amplitude > alike * found[0].amplitude) {
    return two_alike(found[0].frequency_hz, found[1].frequency_hz);
  }
  base::Estimate speed = peaks[found[0].peak].frequency;
  speed.quantity = base::Quantity::speed;
  return speed;
}

}  // namespace stillmass::machine
