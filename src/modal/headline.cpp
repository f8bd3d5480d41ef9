#include "stillmass/modal/headline.hpp"

#include <cmath>

#include "stillmass/base/number.hpp"

namespace stillmass::modal {
namespace {

constexpr double frequency_tolerance = 0.01;
constexpr double damping_tolerance = 0.25;

bool differ(const base::Estimate& a, const base::Estimate& b, double tolerance) {
  const double distance = std::abs(a.value - b.value);
  const double u = std::hypot(base::widened(a.u, a.dof).value_or(0.0), base::widened(b.u, b.dof).value_or(0.0));
  return distance > 2.0 * u && distance > tolerance * std::abs(a.value);
}

std::string sentence(const MethodResult& lead, const MethodResult& other) {
  return "the " + lead.name + " gives " + base::rounded(lead.frequency.value, 4) + " Hz and a damping ratio of " +
         base::rounded(lead.damping_ratio.value) + ", the " + other.name + " " +
         base::rounded(other.frequency.value, 4) + " Hz and " + base::rounded(other.damping_ratio.value);
}

}  // namespace

base::Estimate jackknifed(double all, std::span<const double> without_one, base::Quantity quantity) {
  base::Estimate estimate{all, {}, {}, quantity};
  const double n = static_cast<double>(without_one.size());
  if (without_one.size() < 2) return estimate;
  double mean = 0.0;
  for (const double theta : without_one) mean += theta / n;
  double sum = 0.0;
  for (const double theta : without_one) sum += (theta - mean) * (theta - mean);
  estimate.u = std::sqrt((n - 1.0) / n * sum);
  estimate.dof = n - 1.0;
  return estimate;
}

base::Estimate wider(const base::Estimate& a, const base::Estimate& b) {
  return base::widened(b.u, b.dof).value_or(-1.0) > base::widened(a.u, a.dof).value_or(-1.0) ? b : a;
}

base::Estimate with_added_u(base::Estimate estimate, double u, std::optional<double> dof) {
  const double before = estimate.u.value_or(0.0);
  const double after = std::hypot(before, u);
  if (!(after > 0.0)) return estimate;
  double inverse_dof = 0.0;
  if (estimate.u && estimate.dof) inverse_dof += std::pow(before / after, 4) / *estimate.dof;
  if (dof) inverse_dof += std::pow(u / after, 4) / *dof;
  estimate.u = after;
  estimate.dof = inverse_dof > 0.0 ? std::optional(1.0 / inverse_dof) : std::nullopt;
  return estimate;
}

std::optional<base::Finding> disagreement(std::span<const MethodResult> methods) {
  base::Finding finding{base::Code::methods_disagree, {}, {}, {}, {}, base::Strength::fair, {}};
  for (std::size_t i = 1; i < methods.size(); ++i) {
    const bool apart = differ(methods[0].frequency, methods[i].frequency, frequency_tolerance) ||
                       differ(methods[0].damping_ratio, methods[i].damping_ratio, damping_tolerance);
    if (apart) finding.evidence.push_back(sentence(methods[0], methods[i]));
  }
  if (finding.evidence.empty()) return std::nullopt;
  finding.text = finding.evidence.front();
  return finding;
}

}  // namespace stillmass::modal
