#include "stillmass/numeric/root.hpp"

#include <algorithm>
#include <cmath>
#include <limits>
#include <utility>

#include "stillmass/base/error.hpp"

namespace stillmass::numeric {
namespace {

constexpr double epsilon = std::numeric_limits<double>::epsilon();

using Peaks = std::function<std::optional<PeakPair>(double, double)>;

/// The x at which both peaks are equally high for this y, and the slope of that height along y.
struct EqualPeaks {
  double x;
  double y;
  double height;
  double slope;
};

std::optional<EqualPeaks> equal_peaks(const Peaks& peaks, double x, double y, base::Interval x_range,
                                      double tolerance) {
  auto pair = peaks(x, y);
  if (!pair) return {};
  for (int step = 0; step < 40; ++step) {
    const double by_x = pair->first_by_x - pair->second_by_x;
    double change = -(pair->first - pair->second) / by_x;
    if (!std::isfinite(change)) return {};
    if (std::abs(change) <= tolerance * std::abs(x)) {
      const double slope = (pair->second_by_y * pair->first_by_x - pair->first_by_y * pair->second_by_x) / by_x;
      return EqualPeaks{x, y, std::max(pair->first, pair->second), slope};
    }
    std::optional<PeakPair> next;
    for (int halving = 0; halving < 6 && !next; ++halving, change *= 0.5) {
      next = peaks(x_range.clamped(x + change), y);
      if (next) x = x_range.clamped(x + change);
    }
    if (!next) return {};
    pair = next;
  }
  return {};
}

/// Two points of the curve of equal peaks, on either side of its lowest.
struct Bracket {
  EqualPeaks falling;
  EqualPeaks rising;
};

/// Follows the curve upwards in y from its lower end until it rises. Where two peaks merge, the step is shortened.
std::optional<Bracket> follow(const Peaks& peaks, double x_start, base::Interval x_range, base::Interval y_bracket,
                              double tolerance) {
  auto here = equal_peaks(peaks, x_start, y_bracket.lo, x_range, tolerance);
  if (!here || here->slope >= 0.0) return {};
  double step = 0.4 * y_bracket.width();
  double x_by_y = 0.0;
  while (step > tolerance * here->y) {
    const double y = std::min(here->y + step, y_bracket.hi);
    const auto next = equal_peaks(peaks, here->x + x_by_y * (y - here->y), y, x_range, tolerance);
    if (!next) {
      step *= 0.5;
      continue;
    }
    if (next->slope >= 0.0) return Bracket{*here, *next};
    if (y >= y_bracket.hi) return {};
    x_by_y = (next->x - here->x) / (next->y - here->y);
    here = next;
  }
  return {};
}

}  // namespace

double bracketed_root(const std::function<double(double)>& f, base::Interval bracket, double tolerance) {
  double a = bracket.lo;
  double b = bracket.hi;
  double fa = f(a);
  double fb = f(b);
  if (!(fa * fb <= 0.0)) {
    throw base::Error(base::ErrorKind::internal, "bracketed_root", "no change of sign within the bracket");
  }
  // b is the best estimate, c the end of the bracket on its other side, a the previous estimate.
  double c = a;
  double fc = fa;
  double step = b - a;
  double previous_step = step;
  while (fb != 0.0) {
    if (fb * fc > 0.0) {
      c = a;
      fc = fa;
      step = previous_step = b - a;
    }
    if (std::abs(fc) < std::abs(fb)) {
      a = std::exchange(b, c);
      c = a;
      fa = std::exchange(fb, fc);
      fc = fa;
    }
    const double least = 2.0 * epsilon * std::abs(b) + 0.5 * tolerance;
    const double half = 0.5 * (c - b);
    if (std::abs(half) <= least) break;

    bool bisect = std::abs(previous_step) < least || std::abs(fa) <= std::abs(fb);
    if (!bisect) {
      const double ratio_ba = fb / fa;
      double p = 2.0 * half * ratio_ba;
      double q = 1.0 - ratio_ba;
      if (a != c) {  // inverse quadratic instead of secant
        const double ratio_ac = fa / fc;
        const double ratio_bc = fb / fc;
        p = ratio_ba * (2.0 * half * ratio_ac * (ratio_ac - ratio_bc) - (b - a) * (ratio_bc - 1.0));
        q = (ratio_ac - 1.0) * (ratio_bc - 1.0) * (ratio_ba - 1.0);
      }
      if (p > 0.0) q = -q;
      p = std::abs(p);
      bisect = 2.0 * p >= std::min(3.0 * half * q - std::abs(least * q), std::abs(previous_step * q));
      if (!bisect) {
        previous_step = step;
        step = p / q;
      }
    }
    if (bisect) step = previous_step = half;
    a = b;
    fa = fb;
    b += std::abs(step) > least ? step : std::copysign(least, half);
    fb = f(b);
  }
  return b;
}

Minimum minimum(const std::function<double(double)>& f, base::Interval bracket, double tolerance) {
  const double golden = 0.5 * (3.0 - std::sqrt(5.0));
  double lo = bracket.lo;
  double hi = bracket.hi;
  double best = lo + golden * (hi - lo);
  double second = best;
  double third = best;
  double f_best = f(best);
  double f_second = f_best;
  double f_third = f_best;
  double step = 0.0;
  double previous_step = 0.0;
  while (true) {
    const double middle = 0.5 * (lo + hi);
    const double least = 1e-9 * std::abs(best) + tolerance / 3.0;
    if (std::abs(best - middle) <= 2.0 * least - 0.5 * (hi - lo)) break;

    bool parabola = std::abs(previous_step) > least;
    if (parabola) {
      const double r = (best - second) * (f_best - f_third);
      const double q0 = (best - third) * (f_best - f_second);
      double p = (best - third) * q0 - (best - second) * r;
      double q = 2.0 * (q0 - r);
      if (q > 0.0) p = -p;
      q = std::abs(q);
      const double earlier = std::exchange(previous_step, step);
      parabola = std::abs(p) < std::abs(0.5 * q * earlier) && p > q * (lo - best) && p < q * (hi - best);
      if (parabola) {
        step = p / q;
        const double at = best + step;
        if (at - lo < 2.0 * least || hi - at < 2.0 * least) step = best < middle ? least : -least;
      }
    }
    if (!parabola) {
      previous_step = (best < middle ? hi : lo) - best;
      step = golden * previous_step;
    }
    const double x = best + (std::abs(step) >= least ? step : std::copysign(least, step));
    const double fx = f(x);
    if (fx <= f_best) {
      (x < best ? hi : lo) = best;
      third = std::exchange(second, std::exchange(best, x));
      f_third = std::exchange(f_second, std::exchange(f_best, fx));
    } else {
      (x < best ? lo : hi) = x;
      if (fx <= f_second || second == best) {
        third = std::exchange(second, x);
        f_third = std::exchange(f_second, fx);
      } else if (fx <= f_third || third == best || third == second) {
        third = x;
        f_third = fx;
      }
    }
  }
  for (const double end : {bracket.lo, bracket.hi}) {  // the least value may stand at an end, which is never reached
    if (std::abs(best - end) > 4.0 * (1e-9 * std::abs(best) + tolerance)) continue;
    if (const double value = f(end); value <= f_best) return {end, value};
  }
  return {best, f_best};
}

std::optional<Minimax> minimax_of_two_peaks(const Peaks& peaks, double x_start, base::Interval x_range,
                                            base::Interval y_bracket, double tolerance) {
  auto bracket = follow(peaks, x_start, x_range, y_bracket, tolerance);
  if (!bracket) return {};
  auto& [falling, rising] = *bracket;
  double weight_falling = 1.0;
  double weight_rising = 1.0;
  for (int step = 0; step < 60; ++step) {
    const double slope_falling = weight_falling * falling.slope;
    const double slope_rising = weight_rising * rising.slope;
    const double part = slope_falling / (slope_falling - slope_rising);
    const double y = falling.y + part * (rising.y - falling.y);
    const double x = falling.x + part * (rising.x - falling.x);
    const auto here = equal_peaks(peaks, x, y, x_range, tolerance);
    if (!here) return {};
    EqualPeaks& replaced = here->slope < 0.0 ? falling : rising;
    const double moved = std::abs(here->y - replaced.y);
    // Illinois: the weight of an end that stays is halved, so that both ends close in.
    (here->slope < 0.0 ? weight_rising : weight_falling) *= 0.5;
    (here->slope < 0.0 ? weight_falling : weight_rising) = 1.0;
    replaced = *here;
    if (moved <= tolerance * y || here->slope == 0.0) return Minimax{here->x, here->y, here->height};
  }
  return {};
}

}  // namespace stillmass::numeric
