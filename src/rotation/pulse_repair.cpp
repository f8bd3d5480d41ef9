#include <algorithm>
#include <cmath>
#include <optional>
#include <utility>

#include <fmt/format.h>

#include "stillmass/numeric/statistics.hpp"
#include "stillmass/rotation/tacho.hpp"

namespace stillmass::rotation {
namespace {

// How far an interval may be from the one expected, as a share of it.
constexpr double tolerance = 0.3;
// A crossing that follows so soon, as a share of the intervals around, is the same pulse again.
constexpr double doubled_within = 0.25;

// What was set right, and where.
struct Repairs {
  std::size_t count = 0;
  double from_s = 0.0;
  double to_s = 0.0;

  void add(std::size_t how_many, double from, double to) {
    if (how_many == 0) return;
    if (count == 0) from_s = from;
    to_s = to;
    count += how_many;
  }
  base::Finding finding(base::Code code, const char* what, std::size_t kept) const {
    base::Finding out;
    out.code = code;
    out.text = fmt::format("{} {} among {}, from {:.2f} s to {:.2f} s", count, what, kept, from_s, to_s);
    out.from_s = from_s;
    out.to_s = to_s;
    out.strength = 20 * count >= kept ? base::Strength::strong : base::Strength::fair;
    return out;
  }
};

// The upper quartile of the nine intervals around: that of whole turns even where every pulse is doubled.
double usual_interval(const std::vector<double>& times, std::size_t i) {
  std::vector<double> around;
  const std::size_t from = i > 4 ? i - 4 : 0;
  const std::size_t to = std::min(times.size() - 1, i + 5);
  for (std::size_t k = from; k < to; ++k) around.push_back(times[k + 1] - times[k]);
  return numeric::quantile(std::move(around), 0.75);
}

std::vector<double> without_doubles(const std::vector<double>& times, Repairs& extra) {
  std::vector<double> kept;
  for (std::size_t i = 0; i < times.size(); ++i) {
    if (!kept.empty() && times[i] - kept.back() < doubled_within * usual_interval(times, i - 1)) {
      extra.add(1, times[i], times[i]);
    } else {
      kept.push_back(times[i]);
    }
  }
  return kept;
}

// First crossing that is followed by three intervals alike.
std::optional<std::size_t> first_regular(const std::vector<double>& times) {
  for (std::size_t i = 0; i + 3 < times.size(); ++i) {
    const double first = times[i + 1] - times[i];
    const double second = times[i + 2] - times[i + 1];
    const double third = times[i + 3] - times[i + 2];
    if (std::abs(second - first) < tolerance * first && std::abs(third - second) < tolerance * second) return i;
  }
  return {};
}

struct Next {
  std::size_t index = 0;
  std::size_t steps = 1;  // pulses from the last one, missing ones included
};

// The next true pulse after times[last], expected after `interval`.
std::optional<Next> next_pulse(const std::vector<double>& times, std::size_t last, double interval) {
  std::optional<std::size_t> best;
  std::size_t i = last + 1;
  for (; i < times.size() && times[i] - times[last] <= (1.0 + tolerance) * interval; ++i) {
    const auto miss = [&](std::size_t k) { return std::abs(times[k] - times[last] - interval); };
    if (miss(i) <= tolerance * interval && (!best || miss(i) < miss(*best))) best = i;
  }
  if (best) return Next{*best, 1};
  for (; i < times.size(); ++i) {
    const double ratio = (times[i] - times[last]) / interval;
    const double whole = std::max(2.0, std::round(ratio));
    // After more than three turns without a pulse the speed may have changed: whatever comes next is taken.
    if (ratio > 3.0 || std::abs(ratio - whole) <= tolerance) return Next{i, static_cast<std::size_t>(whole)};
  }
  return {};
}

// The last turns of a shaft that comes to rest: few pulses are left, and each comes later than the one before.
bool comes_to_rest(const std::vector<double>& times, std::size_t last, double interval) {
  constexpr std::size_t few = 8;
  if (times.size() - last > few) return false;
  for (std::size_t i = last; i + 1 < times.size(); ++i) {
    const double next = times[i + 1] - times[i];
    if (next < interval) return false;
    interval = next;
  }
  return true;
}

// Scatter of a pulse's time about a smooth motion. The third difference over whole turns sees neither uneven marks nor
// a steady sweep; its variance is 20 times that of one time.
std::optional<double> time_scatter(const Pulses& pulses) {
  const auto turn = static_cast<std::size_t>(pulses.pulses_per_turn);
  std::vector<double> third;
  for (std::size_t i = 0; i + 3 * turn < pulses.time_s.size(); ++i) {
    if (pulses.turns[i + 3 * turn] - pulses.turns[i] > 3.5) continue;
    const auto t = [&](std::size_t k) { return pulses.time_s[i + k * turn]; };
    third.push_back(std::abs(t(3) - 3.0 * t(2) + 3.0 * t(1) - t(0)));
  }
  if (third.size() < 5) return {};
  return 1.4826 * numeric::median(std::move(third)) / std::sqrt(20.0);  // 1.4826: of a normal scatter
}

base::Refusal refusal(std::string seen) {
  return {"no-pulses", std::move(seen),
          "check the tacho's mark, distance and channel, then record again; or give the threshold"};
}

}  // namespace

base::Answer<Pulses> repaired_pulses(const std::vector<double>& crossings_s, int pulses_per_turn) {
  if (crossings_s.size() < 4) return refusal(fmt::format("{} tacho pulses", crossings_s.size()));
  Repairs missing;
  Repairs extra;
  const std::vector<double> times = without_doubles(crossings_s, extra);
  const auto start = first_regular(times);
  if (!start) return refusal(fmt::format("{} tacho pulses without any regularity", crossings_s.size()));

  Pulses pulses;
  pulses.pulses_per_turn = pulses_per_turn;
  std::size_t last = *start;
  std::size_t count = 0;
  double interval = times[last + 1] - times[last];
  pulses.time_s.push_back(times[last]);
  pulses.turns.push_back(0.0);
  while (const auto next = next_pulse(times, last, interval)) {
    if ((next->steps > 1 || next->index > last + 1) && comes_to_rest(times, last, interval)) break;
    const double elapsed = times[next->index] - times[last];
    if (next->index > last + 1) extra.add(next->index - last - 1, times[last + 1], times[next->index - 1]);
    missing.add(next->steps - 1, times[last], times[next->index]);
    interval = 0.5 * (interval + elapsed / static_cast<double>(next->steps));
    last = next->index;
    count += next->steps;
    pulses.time_s.push_back(times[last]);
    pulses.turns.push_back(static_cast<double>(count) / static_cast<double>(pulses_per_turn));
  }
  const std::size_t kept = pulses.time_s.size();
  if (kept < 4 || 2 * (extra.count + missing.count) > 3 * kept) {
    return refusal(fmt::format("of {} tacho pulses only {} come regularly", crossings_s.size(), kept));
  }
  pulses.missing = missing.count;
  pulses.extra = extra.count;
  pulses.time_u = time_scatter(pulses);
  if (missing.count > 0) pulses.findings.push_back(missing.finding(base::Code::missing_pulses, "missing pulses", kept));
  if (extra.count > 0) pulses.findings.push_back(extra.finding(base::Code::extra_pulses, "extra pulses", kept));
  return pulses;
}

}  // namespace stillmass::rotation
