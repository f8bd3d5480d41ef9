#pragma once

#include <functional>
#include <vector>

namespace stillmass::oracle {

using Rows = std::vector<std::vector<double>>;

/// Where a system of several degrees of freedom is and how it moves.
struct Motion {
  std::vector<double> displacement;
  std::vector<double> velocity;
  std::vector<double> acceleration;
};

/// M q'' + C q' + K q = F(t) by the classical Runge-Kutta method of fourth order with a fixed step, M any regular
/// matrix: a way apart from the program's matrix exponential. Gives the motion at t = 0, every * step, 2 every * step,
/// ..., `count` instants in all.
std::vector<Motion> integrate(const Rows& mass, const Rows& damping, const Rows& stiffness,
                              const std::function<std::vector<double>(double time_s)>& force, const Motion& start,
                              double step_s, int every, int count);

}  // namespace stillmass::oracle
