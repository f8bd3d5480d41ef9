#pragma once

#include <complex>
#include <span>
#include <string>
#include <vector>

#include "stillmass/base/estimate.hpp"
#include "stillmass/modal/mode.hpp"

namespace stillmass::modal {

/// Ratio and phase of the strengths (or deflections) of one mode over points, relative to point `reference`. The ratio
/// is not negative; a point in opposite phase stands at 180 degrees. Phase 0 to 360. Throws `Error` (internal) where
/// the reference does not move.
std::vector<ShapeRatio> shape_ratios(std::span<const std::string> points,
                                     std::span<const std::complex<double>> strengths, std::size_t reference);

/// Modal mass carried to another point: m_a = m_p (phi_p / phi_a)^2, `ratio` = phi_a / phi_p, its relative uncertainty
/// counting twice.
base::Estimate mass_at(const base::Estimate& mass, const base::Estimate& ratio);

/// Modal assurance criterion of two shapes, 0 to 1: |a^H b|^2 / (a^H a b^H b). Source: Allemang & Brown 1982.
double shape_correlation(std::span<const std::complex<double>> a, std::span<const std::complex<double>> b);

}  // namespace stillmass::modal
