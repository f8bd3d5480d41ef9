#pragma once

#include <span>
#include <vector>

#include "stillmass/numeric/matrix.hpp"

namespace stillmass::simulate {

/// e^A by scaling, a Taylor series and squaring; relative error below 1e-12 for the norms met here.
numeric::Matrix exponential(const numeric::Matrix& a);

/// Steps M q'' + C q' + K q = F in time, M diagonal. Exact for a force that is linear between the steps: the state
/// x = (q, q') goes to Phi x + G0 F0 + G1 F1, with Phi, G0, G1 from one matrix exponential (Van Loan 1978). What is
/// left is the straight line in place of the force: a tone of f Hz loses (pi f step)^2 / 3 of its amplitude.
class Propagator {
 public:
  Propagator(std::span<const double> mass, const numeric::Matrix& damping, const numeric::Matrix& stiffness,
             double step_s);

  std::size_t dofs() const { return dofs_; }
  /// Moves the state (2 * dofs values) from the instant of `force_now` to that of `force_next`.
  void step(std::vector<double>& state, std::span<const double> force_now, std::span<const double> force_next);
  /// The row r with: acceleration along `pattern` = r (q, q', F).
  std::vector<double> acceleration_row(std::span<const double> pattern) const;

 private:
  std::size_t dofs_;
  std::vector<double> mass_;
  numeric::Matrix damping_;
  numeric::Matrix stiffness_;
  numeric::Matrix columns_;  ///< row j: what one unit of entry j of (q, q', F0, F1) gives to the next state
  std::vector<double> next_;
};

}  // namespace stillmass::simulate
