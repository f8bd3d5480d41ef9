#include "recording/time_grid.hpp"

#include <algorithm>
#include <cmath>
#include <limits>

#include <fmt/format.h>

#include "stillmass/base/error.hpp"
#include "stillmass/base/number.hpp"

namespace stillmass::recording {
namespace {

constexpr double gap_steps = 1.5;
constexpr double gap_spreads = 6.0;     // robust standard deviations of the steps
constexpr double wide_gap_steps = 5.0;  // where steps above gap_steps are common
constexpr double usual_share = 0.99;
constexpr double common_share = 0.05;
constexpr double repeated_share = 0.2;  // of steps of zero: the stamps are coarser than the step
constexpr double even_tolerance = 0.05;
constexpr double tolerated_uneven_share = 1e-3;
constexpr double tolerated_drift_steps = 0.5;
constexpr double rate_tolerance = 1e-4;  // relative; a round rate is taken no further off than that
constexpr std::size_t gaps_listed = 20;
constexpr double normal_from_mad = 1.4826;  // standard deviation over median absolute deviation, normal distribution

double quantile_of(std::vector<double> values, double share) {
  const auto at = static_cast<std::ptrdiff_t>(share * static_cast<double>(values.size() - 1));
  std::nth_element(values.begin(), values.begin() + at, values.end());
  return values[static_cast<std::size_t>(at)];
}

double median_of(const std::vector<double>& values) { return quantile_of(values, 0.5); }

double share_of(const std::vector<double>& values, double from) {
  const auto many = std::count_if(values.begin(), values.end(), [&](double value) { return value > from; });
  return static_cast<double>(many) / static_cast<double>(values.size());
}

// Of the steps forward, one that few exceed; 0 where there is none.
double usual_rise(std::vector<double> steps) {
  std::erase_if(steps, [](double step) { return step <= 0.0; });
  return steps.empty() ? 0.0 : quantile_of(std::move(steps), 0.9);
}

// Gaps and restarts of the clock among the steps do not count.
double mean_without_jumps(const std::vector<double>& steps, double most) {
  double sum = 0.0;
  double count = 0.0;
  for (const double step : steps) {
    if (step < 0.0 || step > most) continue;
    sum += step;
    count += 1.0;
  }
  return count > 0.0 ? sum / count : 0.0;
}

// The rate with the fewest digits within the uncertainty of the stamps.
double round_rate(double rate_hz, double relative_uncertainty) {
  const double exponent = std::floor(std::log10(rate_hz));
  for (int digits = 1; digits <= 7; ++digits) {
    const double unit = std::pow(10.0, exponent - digits + 1);
    const double candidate =
        unit >= 1.0 ? std::round(rate_hz / unit) * unit : std::round(rate_hz / unit) / std::round(1.0 / unit);
    if (std::abs(candidate - rate_hz) <= relative_uncertainty * rate_hz) return candidate;
  }
  return rate_hz;
}

std::string missing_text(double from_s, double jump_s, double samples) {
  return fmt::format("after {} s the times jump by {} s, {:.0f} {} missing", base::plain(from_s), base::rounded(jump_s),
                     samples, samples == 1.0 ? "sample is" : "samples are");
}

base::Finding finding(base::Code code, std::string text, double from_s, double to_s) {
  base::Finding found{code, std::move(text)};
  found.from_s = from_s;
  found.to_s = to_s;
  return found;
}

}  // namespace

TimeGrid::TimeGrid(const std::vector<double>& first_times_s, double resolution_s, bool single_precision)
    : resolution_s_(resolution_s),
      relative_resolution_(single_precision ? static_cast<double>(std::numeric_limits<float>::epsilon())
                                            : std::numeric_limits<double>::epsilon()) {
  std::vector<double> steps;
  double latest = 0.0;
  for (std::size_t i = 1; i < first_times_s.size(); ++i) {
    steps.push_back(first_times_s[i] - first_times_s[i - 1]);
    latest = std::max(latest, std::abs(first_times_s[i]));
  }
  if (steps.empty()) return;
  resolution_s_ = std::max(resolution_s_, latest * relative_resolution_);

  const double median = median_of(steps);
  repeated_ = 1.0 - share_of(steps, 0.0) > repeated_share;
  if (repeated_) resolution_s_ = std::max(resolution_s_, usual_rise(steps));
  const double mean = mean_without_jumps(steps, wide_gap_steps * std::max(median, 0.0) + 2.0 * resolution_s_);
  if (repeated_) count_rate(first_times_s, steps);
  // Coarse stamps: the median is a multiple of their resolution, the mean is not.
  step_s_ = median > 4.0 * resolution_s_ ? median : mean;

  std::vector<double> departures;
  for (const double step : steps) departures.push_back(std::abs(step - median));
  double gap = std::max(gap_steps * step_s_, step_s_ + gap_spreads * normal_from_mad * median_of(departures));
  if (share_of(steps, gap + resolution_s_) > common_share) gap = std::max(gap, wide_gap_steps * step_s_);
  // Rounding of the stamps shows in the first steps, if it matters at all; a few gaps among them must not count as
  // such.
  const double rounding = repeated_ ? resolution_s_ : std::min(resolution_s_, quantile_of(departures, usual_share));
  gap_from_s_ = gap + rounding;
  back_from_s_ = -resolution_s_ - even_tolerance * step_s_;
  least_even_s_ = step_s_ * (1.0 - even_tolerance) - resolution_s_;
  most_even_s_ = step_s_ * (1.0 + even_tolerance) + resolution_s_;
}

// From the first change of the stamp to the last one, counted in rows, where the clock neither jumps nor runs back.
void TimeGrid::count_rate(const std::vector<double>& first_times_s, const std::vector<double>& steps) {
  const double most = wide_gap_steps * usual_rise(steps);
  if (std::any_of(steps.begin(), steps.end(), [&](double step) { return step < 0.0 || step > most; })) return;
  const auto rises = [](double step) { return step > 0.0; };
  const auto first = std::find_if(steps.begin(), steps.end(), rises) - steps.begin();
  const auto last = steps.rend() - std::find_if(steps.rbegin(), steps.rend(), rises);  // behind the last rise
  if (last - 1 <= first) return;
  counted_rows_ = static_cast<double>(last - 1 - first);
  const double span_s =
      first_times_s[static_cast<std::size_t>(last)] - first_times_s[static_cast<std::size_t>(first + 1)];
  if (span_s > 0.0) counted_rate_hz_ = counted_rows_ / span_s;
}

void TimeGrid::start_first(double time_s) { parts_.push_back({0, 0, time_s, time_s, 0.0}); }

void TimeGrid::start_next(double time_s) {
  TimedRows& part = parts_.back();
  part.rows = rows_ - part.first_row;
  part.last_s = last_s_;
  const double step = time_s - last_s_;
  if (step < 0.0) jumps_back_.push_back(parts_.size());
  // After a jump back nobody knows how long the pause was: the time goes on with one step.
  const double pause = step < 0.0 ? step_s_ : step;
  parts_.push_back({rows_, 0, time_s, time_s, part.start_s + (last_s_ - part.first_s) + pause});
}

double TimeGrid::resolution_at(double time_s) const {
  return std::max(resolution_s_, std::abs(time_s) * relative_resolution_);
}

double TimeGrid::rate(const std::vector<TimedRows>& parts) const {
  double steps = 0.0;
  double span_s = 0.0;
  double uncertainty_s = 0.0;
  for (const TimedRows& part : parts) {
    steps += static_cast<double>(part.rows - 1);
    span_s += part.last_s - part.first_s;
    uncertainty_s += resolution_at(part.last_s);
  }
  if (!(span_s > 0.0)) return 0.0;
  // Short and coarse: the count of rows between changes of the stamp is good to one row.
  const bool count_is_better = counted_rate_hz_ > 0.0 && 1.0 / counted_rows_ < uncertainty_s / span_s;
  if (count_is_better) return round_rate(counted_rate_hz_, std::min(1.0 / counted_rows_, rate_tolerance));
  return round_rate(steps / span_s, std::min(uncertainty_s / span_s, rate_tolerance));
}

// Largest distance of a remembered stamp from the straight line through the ends of its part, s.
double TimeGrid::largest_drift(const std::vector<TimedRows>& parts, const std::vector<RowTime>& remembered,
                               double rate_hz) const {
  double drift = 0.0;
  auto part = parts.begin();
  for (const RowTime& stamp : remembered) {
    while (part != parts.end() && stamp.row >= part->first_row + part->rows) ++part;
    if (part == parts.end()) break;
    const double expected = part->first_s + static_cast<double>(stamp.row - part->first_row) / rate_hz;
    drift = std::max(drift, std::abs(stamp.time_s - expected) - resolution_at(stamp.time_s));
  }
  return drift;
}

GridVerdict TimeGrid::verdict(const std::vector<RowTime>& remembered, const std::string& where) const {
  GridVerdict verdict;
  verdict.parts = parts_;
  if (!verdict.parts.empty()) {
    verdict.parts.back().rows = rows_ - verdict.parts.back().first_row;
    verdict.parts.back().last_s = last_s_;
    verdict.rate_hz = rate(verdict.parts);
  }
  if (!(verdict.rate_hz > 0.0 && std::isfinite(verdict.rate_hz))) {
    throw base::file_error(where, "no sampling rate follows from its times", "check the column of times");
  }

  const std::vector<TimedRows>& parts = verdict.parts;
  for (std::size_t i = 1; i < parts.size() && i <= gaps_listed; ++i) {
    const double from = parts[i - 1].start_s + (parts[i - 1].last_s - parts[i - 1].first_s);
    const double jump = parts[i].first_s - parts[i - 1].last_s;
    const bool back = std::find(jumps_back_.begin(), jumps_back_.end(), i) != jumps_back_.end();
    std::string text = back ? fmt::format("after {} s the times jump back by {} s; how long the pause was is not known",
                                          base::plain(from), base::rounded(-jump))
                            : missing_text(from, jump, std::max(1.0, std::round(jump * verdict.rate_hz) - 1.0));
    if (i == gaps_listed && parts.size() - 1 > gaps_listed) {
      text += fmt::format("; {} more gaps follow", parts.size() - 1 - gaps_listed);
    }
    verdict.findings.push_back(finding(base::Code::gap, std::move(text), from, parts[i].start_s));
  }

  const double drift_steps = largest_drift(parts, remembered, verdict.rate_hz) * verdict.rate_hz;
  const double uneven_share = static_cast<double>(uneven_) / static_cast<double>(std::max<std::int64_t>(1, rows_ - 1));
  verdict.widest_step_s = std::max(widest_step_s_, step_s_);
  verdict.even = uneven_share <= tolerated_uneven_share && drift_steps <= tolerated_drift_steps;
  if (!verdict.even || uneven_ > 0 || repeated_) {
    std::string text;
    if (repeated_) {
      text = fmt::format("the times repeat, they are coarser than the step of {} s", base::rounded(step_s_));
    } else if (uneven_ > 0) {
      text = fmt::format("{} of {} steps between the times depart from {} s by more than 5 %", uneven_, rows_ - 1,
                         base::rounded(step_s_));
    } else {
      text = fmt::format("the clock drifts by {} steps against an even rate", base::rounded(drift_steps));
    }
    if (verdict.even) text += "; the samples are taken as even";
    verdict.findings.push_back(finding(base::Code::uneven_times, std::move(text), 0.0, elapsed_s()));
    if (verdict.even) verdict.findings.back().strength = base::Strength::weak;
  }
  return verdict;
}

}  // namespace stillmass::recording
