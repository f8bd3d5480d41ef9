// The bare limit of sizing absorbers: |velocity|^2 over s = (f/f1)^2 as a ratio of polynomials whose coefficients are
// made once a case, both peaks followed by Newton's method, nothing checked. Constant force.
//
//   limit_absorber minimax|robust CASES

#include <algorithm>
#include <array>
#include <cmath>
#include <cstdio>
#include <cstdlib>
#include <string_view>
#include <vector>

#include "cases.hpp"
#include "timing.hpp"

namespace {

struct Response {
  std::array<double, 4> up;    // s N
  std::array<double, 5> down;  // D

  Response(double mu, double z1, double tuning, double za) {
    const double t = tuning * tuning;
    const double c = 2.0 * za * tuning;
    const double a = 1.0 + t + mu * t + 2.0 * z1 * c;
    const double b0 = c + 2.0 * z1 * t;
    const double b1 = c * (1.0 + mu) + 2.0 * z1;
    up = {0.0, t * t, c * c - 2.0 * t, 1.0};
    down = {t * t, b0 * b0 - 2.0 * a * t, a * a + 2.0 * t - 2.0 * b0 * b1, b1 * b1 - 2.0 * a, 1.0};
  }
  // Height at the peak near s, and s moved there.
  double peak(double& s) const {
    for (int i = 0; i < 20; ++i) {
      const double n = s * (up[1] + s * (up[2] + s));
      const double d = down[0] + s * (down[1] + s * (down[2] + s * (down[3] + s)));
      const double n1 = up[1] + s * (2.0 * up[2] + s * 3.0);
      const double d1 = down[1] + s * (2.0 * down[2] + s * (3.0 * down[3] + s * 4.0));
      const double n2 = 2.0 * up[2] + s * 6.0;
      const double d2 = 2.0 * down[2] + s * (6.0 * down[3] + s * 12.0);
      const double slope = n1 * d - n * d1;
      const double bend = n2 * d - n * d2;
      const double step = bend < 0.0 ? std::clamp(-slope / bend, -0.05, 0.05) : (slope > 0.0 ? 0.03 : -0.03);
      if (std::abs(step) < 1e-4) return n / d + 0.5 * slope / (d * d) * step;
      s += step;
    }
    return s * (up[1] + s * (up[2] + s)) / (down[0] + s * (down[1] + s * (down[2] + s * (down[3] + s))));
  }
};

struct Peaks {
  double low = 0.0, high = 0.0;
  explicit Peaks(double mu) : low(1.0 - 0.9 * std::sqrt(0.5 * mu)), high(1.0 + 0.6 * std::sqrt(0.5 * mu)) {
    low *= low;
    high *= high;
  }
};

// Least height over tuning for one damping: where both peaks are equal (secant).
double equal(const bench::Case& m, double damping, double& tuning, Peaks& at) {
  const auto difference = [&](double t, double& height) {
    const Response response(m.mass_ratio, m.damping, t, damping);
    const double low = response.peak(at.low);
    const double high = response.peak(at.high);
    height = std::max(low, high);
    return std::log(low / high);
  };
  double height = 0.0;
  double before = tuning * 1.002;
  double d0 = difference(before, height);
  double d1 = difference(tuning, height);
  for (int i = 0; i < 4 && std::abs(d1) > 1e-10 && d1 != d0; ++i) {
    const double next = tuning - d1 * (tuning - before) / (d1 - d0);
    before = tuning;
    d0 = d1;
    tuning = next;
    d1 = difference(tuning, height);
  }
  return height;
}

struct Found {
  double tuning, damping, height;
};

Found minimax(const bench::Case& m) {
  constexpr double golden = 0.6180339887498949;
  double tuning = std::pow(1.0 + m.mass_ratio, -0.75);
  const double middle = std::sqrt(0.375 * m.mass_ratio / (1.0 + m.mass_ratio)) + 0.13 * m.damping;
  double lo = 0.8 * middle, hi = 1.25 * middle;
  Peaks at(m.mass_ratio);
  double a = hi - golden * (hi - lo), b = lo + golden * (hi - lo);
  double fa = equal(m, a, tuning, at), fb = equal(m, b, tuning, at);
  for (int i = 0; i < 14; ++i) {
    if (fa < fb) {
      hi = b;
      b = a;
      fb = fa;
      a = hi - golden * (hi - lo);
      fa = equal(m, a, tuning, at);
    } else {
      lo = a;
      a = b;
      fa = fb;
      b = lo + golden * (hi - lo);
      fb = equal(m, b, tuning, at);
    }
  }
  return {tuning, 0.5 * (lo + hi), std::sqrt(std::min(fa, fb))};
}

// Compass search over tuning and damping for the 95th percentile of the greater peak.
Found robust(const std::vector<bench::Case>& cases) {
  std::vector<Peaks> at;
  for (const bench::Case& m : cases) at.emplace_back(m.mass_ratio);
  std::vector<double> heights(cases.size());
  const auto cost = [&](double tuning, double damping) {
    for (std::size_t i = 0; i < cases.size(); ++i) {
      const Response response(cases[i].mass_ratio, cases[i].damping, tuning / cases[i].frequency, damping);
      double low = response.peak(at[i].low);
      double high = response.peak(at[i].high);
      if (at[i].high - at[i].low < 0.05) {  // one of them was lost, or there is but one
        at[i] = Peaks(cases[i].mass_ratio);
        low = response.peak(at[i].low);
        high = response.peak(at[i].high);
      }
      heights[i] = std::max(low, high);
    }
    const auto rank =
        heights.begin() + static_cast<std::ptrdiff_t>(std::ceil(0.95 * static_cast<double>(heights.size()))) - 1;
    std::nth_element(heights.begin(), rank, heights.end());
    return std::sqrt(*rank);
  };
  const Found start = minimax({0.1, 0.01, 1.0});
  Found best{start.tuning, start.damping, 0.0};
  best.height = cost(best.tuning, best.damping);
  for (double scale = 1.0; 0.02 * scale >= 5e-4;) {
    bool moved = false;
    for (const auto& [dt, dz] :
         std::array<std::array<double, 2>, 4>{{{0.02, 0.0}, {-0.02, 0.0}, {0.0, 0.2}, {0.0, -0.2}}}) {
      Found next{best.tuning * std::exp(scale * dt), best.damping * std::exp(scale * dz), 0.0};
      next.height = cost(next.tuning, next.damping);
      if (next.height >= best.height) continue;
      best = next;
      moved = true;
      break;
    }
    if (!moved) scale *= 0.5;
  }
  return best;
}

}  // namespace

int main(int argc, char** argv) {
  if (argc != 3) bench::fail("limit_absorber minimax|robust CASES");
  const auto cases = bench::cases(static_cast<std::size_t>(std::atoll(argv[2])));
  if (std::string_view(argv[1]) == "robust") {
    bench::timed([&] {
      const Found found = robust(cases);
      std::printf("%.6g %.6g %.9g\n", found.tuning, found.damping, found.height);
    });
    return 0;
  }
  bench::timed([&] {
    std::vector<Found> found(cases.size());
    const unsigned threads = bench::all_threads();
    bench::on_threads(threads, [&](unsigned t) {
      for (std::size_t i = cases.size() * t / threads; i < cases.size() * (t + 1) / threads; ++i)
        found[i] = minimax(cases[i]);
    });
    std::printf("%.9g %.9g\n", found[0].tuning, found[0].height);
  });
  return 0;
}
