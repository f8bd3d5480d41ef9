#include "stillmass/numeric/distribution.hpp"

#include <cmath>

#include <boost/math/distributions/chi_squared.hpp>
#include <boost/math/distributions/fisher_f.hpp>
#include <boost/math/distributions/normal.hpp>
#include <boost/math/distributions/students_t.hpp>

#include "stillmass/base/error.hpp"

namespace stillmass::numeric {
namespace {

void require(bool holds, const char* what) {
  if (!holds) throw base::Error(base::ErrorKind::internal, "numeric/distribution", what);
}

double degrees(double dof) {
  require(std::isfinite(dof) && dof > 0.0, "degrees of freedom must be finite and > 0");
  return dof;
}

double argument(double x) {
  require(!std::isnan(x), "the argument is not a number");
  return x;
}

double probability_of(double p) {
  require(p > 0.0 && p < 1.0, "a probability must lie between 0 and 1");
  return p;
}

}  // namespace

double normal_cdf(double x) { return boost::math::cdf(boost::math::normal(), argument(x)); }
double normal_quantile(double probability) {
  return boost::math::quantile(boost::math::normal(), probability_of(probability));
}

double chi_square_cdf(double x, double dof) {
  return argument(x) <= 0.0 ? 0.0 : boost::math::cdf(boost::math::chi_squared(degrees(dof)), x);
}
double chi_square_quantile(double probability, double dof) {
  return boost::math::quantile(boost::math::chi_squared(degrees(dof)), probability_of(probability));
}

double student_cdf(double t, double dof) {
  return boost::math::cdf(boost::math::students_t(degrees(dof)), argument(t));
}
double student_quantile(double probability, double dof) {
  return boost::math::quantile(boost::math::students_t(degrees(dof)), probability_of(probability));
}

double f_cdf(double x, double dof1, double dof2) {
  return argument(x) <= 0.0 ? 0.0 : boost::math::cdf(boost::math::fisher_f(degrees(dof1), degrees(dof2)), x);
}
double f_quantile(double probability, double dof1, double dof2) {
  return boost::math::quantile(boost::math::fisher_f(degrees(dof1), degrees(dof2)), probability_of(probability));
}

}  // namespace stillmass::numeric
