#pragma once

namespace stillmass::numeric {

// Cumulative probabilities and their inverses (quantiles). Degrees of freedom are real numbers > 0, probabilities lie
// strictly between 0 and 1 for quantiles; anything else throws `base::Error` (internal).

double normal_cdf(double x);
double normal_quantile(double probability);
double chi_square_cdf(double x, double dof);
double chi_square_quantile(double probability, double dof);
double student_cdf(double t, double dof);
double student_quantile(double probability, double dof);
double f_cdf(double x, double dof1, double dof2);
double f_quantile(double probability, double dof1, double dof2);

}  // namespace stillmass::numeric
