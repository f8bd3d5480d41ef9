#pragma once

#include <complex>
#include <cstddef>
#include <memory>
#include <span>
#include <vector>

namespace stillmass::spectral {

/// The discrete Fourier transform of weighted real blocks of one length. Its buffers are its own: one object a thread.
/// A copy shares the plan and the weights and has its own buffers, so a copy is cheap.
class BlockTransform {
 public:
  /// weights: one a sample, n >= 1 of them. Throws `Error` (internal) where there are none.
  explicit BlockTransform(std::vector<double> weights);
  ~BlockTransform();
  BlockTransform(const BlockTransform& other);
  BlockTransform(BlockTransform&&) noexcept;
  BlockTransform& operator=(const BlockTransform&) = delete;

  std::size_t length() const;
  std::size_t lines() const { return length() / 2 + 1; }
  std::span<const double> weights() const;
  /// X[k] = sum over t of w[t] (x[t] - offset) exp(-2 pi i k t / n), k = 0 ... n/2. The result stands until the next
  /// call. The block has n samples.
  std::span<const std::complex<double>> operator()(std::span<const double> block, double offset = 0.0);

 private:
  struct Parts;
  std::unique_ptr<Parts> parts_;
};

/// Factor from |X[k]|^2 to a one-sided density: 1 / (rate * norm) at 0 and at rate/2, twice that between. `norm` is
/// sum(w^2) for stationary signals.
std::vector<double> density_factors(std::size_t length, double rate_hz, double norm);

}  // namespace stillmass::spectral
