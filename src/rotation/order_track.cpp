#include "stillmass/rotation/order_track.hpp"

#include <algorithm>
#include <array>
#include <cmath>
#include <numbers>
#include <utility>

#include <fmt/format.h>

#include "stillmass/base/error.hpp"
#include "stillmass/base/parallel.hpp"
#include "stillmass/rotation/angular_resampler.hpp"

namespace stillmass::rotation {
namespace {

using Complex = std::complex<double>;
using std::numbers::pi;

constexpr double greatest_order = 100.0;
constexpr double beside = 0.5;  // orders on both sides at which the noise is read
constexpr std::size_t blocks_at_once = 32;

// Half the Fourier coefficient of a block at one order, under a Hann window, as r.m.s. with phase.
class OrderFilter {
 public:
  OrderFilter(double order, std::size_t samples_per_turn, std::size_t turns) : order_(order) {
    const std::size_t n = samples_per_turn * turns;
    const double weight = 2.0 * std::numbers::sqrt2 / static_cast<double>(n);  // the window's mean is 1/2
    for (std::size_t i = 0; i < n; ++i) {
      const double hann = 0.5 - 0.5 * std::cos(2.0 * pi * static_cast<double>(i) / static_cast<double>(n));
      const double turn = static_cast<double>(i) / static_cast<double>(samples_per_turn);
      taps_.push_back(weight * hann * std::polar(1.0, -2.0 * pi * order * turn));
    }
  }
  Complex operator()(const double* samples, double first_turn) const {
    Complex sum = 0.0;
    for (std::size_t i = 0; i < taps_.size(); ++i) sum += taps_[i] * samples[i];
    return sum * std::polar(1.0, -2.0 * pi * std::fmod(order_ * first_turn, 1.0));
  }

 private:
  double order_;
  std::vector<Complex> taps_;
};

struct OrderFilters {
  OrderFilter middle;
  std::vector<OrderFilter> neighbours;
};

struct Point {
  Complex value;
  double noise = 0.0;
};

// One block of turns: its points by channel, then order; absent where there is none.
struct Row {
  double time_s = 0.0;
  double speed_hz = 0.0;
  std::optional<double> sweep;
  std::vector<std::optional<Point>> points;
};

std::vector<std::size_t> vibration_channels(const recording::Recording& recording) {
  std::vector<std::size_t> out;
  for (std::size_t c = 0; c < recording.channels.size(); ++c) {
    if (recording.channels[c].role == recording::Role::vibration) out.push_back(c);
  }
  return out;
}

void check(const OrderOptions& options) {
  for (const double order : options.orders) {
    if (!(order > 0.0) || order > greatest_order) {
      throw base::usage_error("orders", fmt::format("order {} is outside 0 to {}", order, greatest_order));
    }
  }
  if (options.turns_per_block < 4) throw base::usage_error("orders", "a block must have at least 4 turns");
  if (!(options.overlap >= 0.0) || options.overlap > 0.95) {
    throw base::usage_error("orders", "the overlap must lie in 0 to 0.95");
  }
}

// Cuts a recording into blocks of turns and reads the orders of each.
class Tracker {
 public:
  Tracker(const recording::Reader& reader, recording::FrameRange range, const SpeedCurve& curve, OrderOptions options)
      : curve_(curve),
        options_(std::move(options)),
        per_turn_(samples_per_turn(options_)),
        usable_hz_(0.4 * reader.recording().rate_hz),
        resampler_(reader, range, curve, {per_turn_, options_.channels}) {
    for (const double order : options_.orders) {
      OrderFilters& filters =
          filters_.emplace_back(OrderFilters{OrderFilter(order, per_turn_, options_.turns_per_block), {}});
      for (const double near : {order - beside, order + beside}) {
        if (near > 0.25) filters.neighbours.emplace_back(near, per_turn_, options_.turns_per_block);
      }
    }
    const auto turns = static_cast<double>(options_.turns_per_block);
    hop_ = std::max<std::int64_t>(1, std::llround(turns * (1.0 - options_.overlap)));
    const auto per_turn = static_cast<std::int64_t>(per_turn_);
    const AngularRange all = resampler_.available();
    first_turn_ = (all.begin + per_turn - 1) / per_turn;
    const std::int64_t whole = all.end / per_turn - first_turn_ - static_cast<std::int64_t>(options_.turns_per_block);
    blocks_ = all.size() == 0 || whole < 0 ? 0 : static_cast<std::size_t>(whole / hop_) + 1;
  }

  std::size_t blocks() const { return blocks_; }

  std::vector<Row> rows(std::size_t begin, std::size_t end) const {
    AngularResampler resampler = resampler_.second();
    const AngularRange wanted{samples_of(begin).begin, samples_of(end - 1).end};
    const AngularBlock samples = resampler.samples(wanted);
    std::vector<Row> out;
    for (std::size_t block = begin; block < end; ++block) out.push_back(row(samples, block));
    return out;
  }

 private:
  // Enough that the highest order, and the noise beside it, lies within the resampler's flat band.
  static std::size_t samples_per_turn(const OrderOptions& options) {
    double highest = 1.0;
    for (const double order : options.orders) highest = std::max(highest, order + beside);
    std::size_t out = 16;
    while (0.4 * static_cast<double>(out) < highest) out *= 2;
    return out;
  }

  AngularRange samples_of(std::size_t block) const {
    const std::int64_t turn = first_turn_ + static_cast<std::int64_t>(block) * hop_;
    const auto per_turn = static_cast<std::int64_t>(per_turn_);
    return {turn * per_turn, (turn + static_cast<std::int64_t>(options_.turns_per_block)) * per_turn};
  }

  Row row(const AngularBlock& samples, std::size_t block) const {
    const AngularRange range = samples_of(block);
    const auto turns = static_cast<double>(options_.turns_per_block);
    const double first = static_cast<double>(first_turn_ + static_cast<std::int64_t>(block) * hop_);
    Row row;
    row.time_s = curve_.time_at(first + 0.5 * turns);
    row.speed_hz = curve_.mean_speed(first + 0.25 * turns, first + 0.75 * turns).value;
    row.sweep = curve_.sweep_rate(row.time_s);
    const double fastest = std::max(curve_.mean_speed(first, first + 1.0).value,
                                    curve_.mean_speed(first + turns - 1.0, first + turns).value);
    for (std::size_t c = 0; c < samples.channels.size(); ++c) {
      const bool valid = samples.is_valid(c, range);
      const double* from = samples.channels[c].data() + (range.begin - samples.first);
      for (std::size_t o = 0; o < options_.orders.size(); ++o) {
        std::optional<Point>& point = row.points.emplace_back();
        if (!valid || options_.orders[o] * fastest > usable_hz_) continue;
        point = Point{filters_[o].middle(from, first), 0.0};
        double square = 0.0;
        for (const OrderFilter& near : filters_[o].neighbours) square += std::norm(near(from, first));
        point->noise = std::sqrt(square / static_cast<double>(filters_[o].neighbours.size()));
      }
    }
    return row;
  }

  const SpeedCurve& curve_;
  OrderOptions options_;
  std::size_t per_turn_;
  double usable_hz_;
  AngularResampler resampler_;
  std::vector<OrderFilters> filters_;
  std::int64_t hop_ = 1;
  std::int64_t first_turn_ = 0;
  std::size_t blocks_ = 0;
};

int derivative(base::Quantity quantity) {
  switch (quantity) {
    case base::Quantity::displacement:
      return 0;
    case base::Quantity::velocity:
      return 1;
    case base::Quantity::acceleration:
      return 2;
    default:
      throw base::usage_error("order track", fmt::format("{} is no vibration quantity", base::name(quantity)));
  }
}

}  // namespace

double OrderTrack::phase_lag_deg(std::size_t i) const {
  const double lag = std::fmod(-std::arg(value[i]) * 180.0 / pi + 360.0, 360.0);
  return lag >= 360.0 ? 0.0 : lag;
}

std::vector<OrderTrack> order_tracks(const recording::Reader& reader, recording::FrameRange range,
                                     const SpeedCurve& curve, const OrderOptions& options,
                                     const base::Context& context) {
  check(options);
  const recording::Recording& recording = reader.recording();
  OrderOptions all = options;
  if (all.channels.empty()) all.channels = vibration_channels(recording);
  const Tracker tracker(reader, range, curve, all);

  std::vector<OrderTrack> tracks;
  for (const std::size_t channel : all.channels) {
    for (const double order : all.orders) {
      OrderTrack& track = tracks.emplace_back();
      track.order = order;
      track.channel = recording.channels[channel].name;
      track.quantity = recording.channels[channel].unit.quantity;
      track.turns_per_block = all.turns_per_block;
    }
  }
  std::size_t done = 0;
  base::for_ranges(
      context, tracker.blocks(), blocks_at_once,
      [&](std::size_t begin, std::size_t end) { return tracker.rows(begin, end); },
      [&](const std::vector<Row>& rows) {
        for (const Row& row : rows) {
          for (std::size_t i = 0; i < tracks.size(); ++i) {
            if (!row.points[i]) continue;
            tracks[i].time_s.push_back(row.time_s);
            tracks[i].speed_hz.push_back(row.speed_hz);
            tracks[i].sweep_hz_per_s.push_back(row.sweep);
            tracks[i].value.push_back(row.points[i]->value);
            tracks[i].noise.push_back(row.points[i]->noise);
          }
        }
        done += rows.size();
        context.report("tracking orders", static_cast<double>(done) / static_cast<double>(tracker.blocks()));
      });
  return tracks;
}

OrderTrack in_quantity(const OrderTrack& track, base::Quantity quantity) {
  const int steps = derivative(quantity) - derivative(track.quantity);
  OrderTrack out = track;
  out.quantity = quantity;
  for (std::size_t i = 0; i < out.value.size(); ++i) {
    const Complex factor = std::pow(Complex(0.0, 2.0 * pi * track.frequency(i)), steps);
    out.value[i] *= factor;
    out.noise[i] *= std::abs(factor);
  }
  return out;
}

}  // namespace stillmass::rotation
