#include "oracle/integrator.hpp"

#include <cmath>
#include <cstddef>
#include <utility>

namespace stillmass::oracle {
namespace {

using Vector = std::vector<double>;

// A x = b by elimination with row exchange.
Vector solve(Rows a, Vector b) {
  const std::size_t n = b.size();
  for (std::size_t k = 0; k < n; ++k) {
    std::size_t largest = k;
    for (std::size_t i = k + 1; i < n; ++i) {
      if (std::abs(a[i][k]) > std::abs(a[largest][k])) largest = i;
    }
    std::swap(a[k], a[largest]);
    std::swap(b[k], b[largest]);
    for (std::size_t i = k + 1; i < n; ++i) {
      const double factor = a[i][k] / a[k][k];
      for (std::size_t j = k; j < n; ++j) a[i][j] -= factor * a[k][j];
      b[i] -= factor * b[k];
    }
  }
  for (std::size_t k = n; k-- > 0;) {
    for (std::size_t j = k + 1; j < n; ++j) b[k] -= a[k][j] * b[j];
    b[k] /= a[k][k];
  }
  return b;
}

Vector moved(const Vector& from, const Vector& rate, double by) {
  Vector to = from;
  for (std::size_t i = 0; i < to.size(); ++i) to[i] += by * rate[i];
  return to;
}

// (a + 2 b + 2 c + d) / 6
Vector weighted(const Vector& a, const Vector& b, const Vector& c, const Vector& d) {
  Vector sum(a.size());
  for (std::size_t i = 0; i < sum.size(); ++i) sum[i] = (a[i] + 2.0 * b[i] + 2.0 * c[i] + d[i]) / 6.0;
  return sum;
}

}  // namespace

std::vector<Motion> integrate(const Rows& mass, const Rows& damping, const Rows& stiffness,
                              const std::function<std::vector<double>(double time_s)>& force, const Motion& start,
                              double step_s, int every, int count) {
  const auto acceleration = [&](double t, const Vector& q, const Vector& v) {
    Vector rest = force(t);
    for (std::size_t i = 0; i < rest.size(); ++i) {
      for (std::size_t j = 0; j < rest.size(); ++j) rest[i] -= damping[i][j] * v[j] + stiffness[i][j] * q[j];
    }
    return solve(mass, rest);
  };

  Vector q = start.displacement;
  Vector v = start.velocity;
  std::vector<Motion> motions;
  for (int step = 0; static_cast<int>(motions.size()) < count; ++step) {
    const double t = step * step_s;
    const Vector a1 = acceleration(t, q, v);
    if (step % every == 0) motions.push_back({q, v, a1});
    const Vector v2 = moved(v, a1, 0.5 * step_s);
    const Vector a2 = acceleration(t + 0.5 * step_s, moved(q, v, 0.5 * step_s), v2);
    const Vector v3 = moved(v, a2, 0.5 * step_s);
    const Vector a3 = acceleration(t + 0.5 * step_s, moved(q, v2, 0.5 * step_s), v3);
    const Vector v4 = moved(v, a3, step_s);
    const Vector a4 = acceleration(t + step_s, moved(q, v3, step_s), v4);
    q = moved(q, weighted(v, v2, v3, v4), step_s);
    v = moved(v, weighted(a1, a2, a3, a4), step_s);
  }
  return motions;
}

}  // namespace stillmass::oracle
