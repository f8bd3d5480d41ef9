#pragma once

#include <optional>
#include <span>
#include <string>
#include <vector>

#include "stillmass/base/estimate.hpp"
#include "stillmass/base/finding.hpp"
#include "stillmass/modal/mode.hpp"

namespace stillmass::modal {

/// The estimate of a quantity from all hits with its jackknife over hits: theta_i is the estimate without hit i,
/// u^2 = (n - 1) / n sum (theta_i - mean)^2, dof = n - 1. Fewer than two: no uncertainty. Source: Efron & Stein 1981.
base::Estimate jackknifed(double all, std::span<const double> without_one, base::Quantity quantity);

/// Of two statements of the uncertainty of one value (the scatter over hits; the scatter about the fit), the one whose
/// 95 % interval is wider. They see partly the same noise, so adding them would count it twice.
base::Estimate wider(const base::Estimate& a, const base::Estimate& b);

/// Sum of independent variances with degrees of freedom after Welch-Satterthwaite (JCGM 100, G.4.1). An absent one
/// counts as nothing.
base::Estimate with_added_u(base::Estimate estimate, double u, std::optional<double> dof = {});

/// Which method leads: the first. The others stand beside it; a `methods_disagree` finding where one differs by more
/// than twice the combined uncertainty (widened for few degrees of freedom) and by more than 1 % of the frequency or
/// 25 % of the damping.
std::optional<base::Finding> disagreement(std::span<const MethodResult> methods);

}  // namespace stillmass::modal
