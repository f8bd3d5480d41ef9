#include "machine/speed_fit.hpp"

#include <algorithm>
#include <cmath>
#include <set>

namespace stillmass::machine {
namespace {

constexpr double limit_z = 3.0;  // standard uncertainties: further off, a line is another one's
constexpr double window_sigma =
    0.6;  // of a Hann window's lobe, lines: a Gaussian of its noise bandwidth, 1.5 / sqrt(2 pi)
constexpr double mean_error = 0.5;  // of the mean from the peak of a line spread by wander, in its standard deviations

struct Value {
  double value = 0.0;
  double u = 0.0;
};

// Weighted mean with its chi-square.
struct Mean {
  Value mean;
  double chi2 = 0.0;
};

Mean weighted_mean(std::span<const Value> values) {
  double sum = 0.0;
  double weights = 0.0;
  for (const Value& each : values) {
    const double w = 1.0 / (each.u * each.u);
    sum += w * each.value;
    weights += w;
  }
  Mean out{{sum / weights, 1.0 / std::sqrt(weights)}, 0.0};
  for (const Value& each : values) out.chi2 += std::pow((each.value - out.mean.value) / each.u, 2);
  return out;
}

// Too great for chance: beyond the mean and three standard deviations of chi-square.
bool scatters(double chi2, std::size_t count) {
  if (count < 2) return false;
  const auto dof = static_cast<double>(count - 1);
  return chi2 > dof + limit_z * std::sqrt(2.0 * dof);
}

// Drops the value without which the others agree best, one after the other, while they scatter and more than half
// would be left. One that is wrong need not be the one furthest from the mean: it may be the most exact.
std::vector<bool> agreeing(const std::vector<Value>& values) {
  std::vector<bool> used(values.size(), true);
  const auto chosen = [&](std::size_t without) {
    std::vector<Value> out;
    for (std::size_t i = 0; i < values.size(); ++i) {
      if (used[i] && i != without) out.push_back(values[i]);
    }
    return out;
  };
  for (std::size_t left = values.size(); left >= 3 && 2 * (left - 1) > values.size(); --left) {
    if (!scatters(weighted_mean(chosen(values.size())).chi2, left)) break;
    std::size_t worst = 0;
    double least = INFINITY;
    for (std::size_t i = 0; i < values.size(); ++i) {
      if (!used[i]) continue;
      const double chi2 = weighted_mean(chosen(i)).chi2;
      if (chi2 < least) {
        least = chi2;
        worst = i;
      }
    }
    used[worst] = false;
  }
  return used;
}

// u widened by the scatter where that is more than chance: so that +- 2 u holds, whatever the number of values.
double widened(const Mean& mean, std::size_t count) {
  if (count < 2) return mean.mean.u;
  const auto dof = static_cast<double>(count - 1);
  const double birge = std::sqrt(mean.chi2 / dof);
  if (birge <= 1.0) return mean.mean.u;
  return mean.mean.u * (scatters(mean.chi2, count) ? *base::widened(birge, dof) : birge);
}

// The lines at one order.
struct Order {
  int order = 1;
  std::vector<std::size_t> peaks;
  Value speed;
  double wander_hz = 0.0;  // of the speed
  bool used = true;
};

class Fit {
 public:
  Fit(std::span<const Peak> peaks, double line_hz, const std::vector<bool>& left_out)
      : peaks_(peaks), line_hz_(line_hz), left_out_(left_out) {}

  // Nearest line of each channel to that order.
  void add(int order, const Value& speed) {
    Order out;
    out.order = order;
    std::set<std::size_t> channels;
    for (const Peak& peak : peaks_) channels.insert(peak.channel);
    for (const std::size_t channel : channels) {
      std::optional<std::size_t> nearest;
      for (std::size_t i = 0; i < peaks_.size(); ++i) {
        if (peaks_[i].channel != channel || left_out_[i] || distance(i, order, speed) > reach(i, order, speed))
          continue;
        if (!nearest || distance(i, order, speed) < distance(*nearest, order, speed)) nearest = i;
      }
      if (nearest) out.peaks.push_back(*nearest);
    }
    if (out.peaks.empty()) return;
    std::vector<Value> values;
    for (const std::size_t i : out.peaks) values.push_back({peaks_[i].frequency.value / order, u_of(i) / order});
    const std::vector<bool> agree = agreeing(values);
    std::vector<Value> kept;
    std::vector<double> breadths;
    for (std::size_t i = 0; i < values.size(); ++i) {
      if (!agree[i]) {
        disagreeing_.push_back(out.peaks[i]);
        continue;
      }
      kept.push_back(values[i]);
      breadths.push_back(peaks_[out.peaks[i]].breadth);
    }
    const Mean mean = weighted_mean(kept);
    out.speed = {mean.mean.value, widened(mean, kept.size())};
    std::nth_element(breadths.begin(), breadths.begin() + static_cast<std::ptrdiff_t>(breadths.size() / 2),
                     breadths.end());
    const double breadth = breadths[breadths.size() / 2];
    out.wander_hz = window_sigma * line_hz_ * std::sqrt(std::max(0.0, breadth * breadth - 1.0)) / order;
    orders_.push_back(std::move(out));
  }

  // The speed from the orders so far, those that disagree left out.
  Value joined() {
    std::vector<Value> values;
    for (const Order& each : orders_) values.push_back(each.speed);
    const std::vector<bool> agree = agreeing(values);
    std::vector<Value> kept;
    std::vector<double> wander;
    for (std::size_t i = 0; i < orders_.size(); ++i) {
      orders_[i].used = agree[i];
      if (!agree[i]) continue;
      kept.push_back(values[i]);
      wander.push_back(orders_[i].wander_hz);
    }
    const Mean mean = weighted_mean(kept);
    std::nth_element(wander.begin(), wander.begin() + static_cast<std::ptrdiff_t>(wander.size() / 2), wander.end());
    wander_hz_ = wander[wander.size() / 2];
    return {mean.mean.value, std::hypot(widened(mean, kept.size()), mean_error * wander_hz_)};
  }

  bool empty() const { return orders_.empty(); }

  std::optional<RunningSpeed> result(const Value& speed) const {
    const bool first = orders_.front().order == 1 && orders_.front().used;
    const auto used = std::count_if(orders_.begin(), orders_.end(), [](const Order& each) { return each.used; });
    if (!first && used < 2) return {};
    RunningSpeed out;
    out.speed.value = speed.value;
    out.speed.u = speed.u;
    out.speed.quantity = base::Quantity::speed;
    out.wander = wander_hz_ / speed.value;
    for (const Order& each : orders_) {
      for (const std::size_t i : each.peaks) {
        const bool agrees = std::find(disagreeing_.begin(), disagreeing_.end(), i) == disagreeing_.end();
        const double order = each.order;
        out.lines.push_back({i, order, peaks_[i].frequency.value - order * speed.value, each.used && agrees});
      }
    }
    return out;
  }

 private:
  double u_of(std::size_t i) const {
    const auto& u = peaks_[i].frequency.u;
    return u && *u > 0.0 ? *u : line_hz_ / std::sqrt(12.0);
  }
  double distance(std::size_t i, int order, const Value& speed) const {
    return std::abs(peaks_[i].frequency.value - order * speed.value);
  }
  double reach(std::size_t i, int order, const Value& speed) const {
    return std::max(line_hz_, limit_z * std::hypot(u_of(i), order * speed.u));
  }

  std::span<const Peak> peaks_;
  double line_hz_;
  const std::vector<bool>& left_out_;
  std::vector<Order> orders_;
  std::vector<std::size_t> disagreeing_;
  double wander_hz_ = 0.0;
};

}  // namespace

std::optional<RunningSpeed> fit_speed(std::span<const Peak> peaks, std::span<const int> orders, double start_hz,
                                      double line_hz, const std::vector<bool>& left_out) {
  Fit fit(peaks, line_hz, left_out);
  Value speed{start_hz, line_hz / std::sqrt(12.0)};
  for (const int order : orders) {
    fit.add(order, speed);
    if (!fit.empty()) speed = fit.joined();
  }
  return fit.empty() ? std::nullopt : fit.result(speed);
}

std::size_t orders_used(const RunningSpeed& speed) {
  std::set<double> orders;
  for (const SpeedLine& line : speed.lines) {
    if (line.used) orders.insert(line.order);
  }
  return orders.size();
}

}  // namespace stillmass::machine
