#pragma once

#include <complex>
#include <cstddef>
#include <memory>
#include <span>

namespace stillmass::spectral {

/// One forward transform of n real samples, sum over t of x[t] exp(-2 pi i k t / n), with its buffers. A copy shares
/// the plan and has buffers of its own; two objects may run on two threads at once.
class RealFft {
 public:
  /// n >= 1. Throws `Error` (internal) for 0 or more than 2^31 - 1.
  explicit RealFft(std::size_t n);
  RealFft(const RealFft& other);
  RealFft(RealFft&&) noexcept = default;
  RealFft& operator=(const RealFft&) = delete;
  ~RealFft() = default;

  std::span<double> input() { return {input_.get(), n_}; }
  /// Transforms `input` (which it leaves as it is); n/2 + 1 values that stand until the next call.
  std::span<const std::complex<double>> run();

 private:
  struct Free {
    void operator()(void* memory) const noexcept;
  };
  struct Plan;

  std::size_t n_;
  std::unique_ptr<double[], Free> input_;
  std::unique_ptr<std::complex<double>[], Free> output_;
  std::shared_ptr<const Plan> plan_;
};

/// The same for complex samples, in place and forward.
class ComplexFft {
 public:
  explicit ComplexFft(std::size_t n);
  ~ComplexFft();
  ComplexFft(const ComplexFft&) = delete;
  ComplexFft& operator=(const ComplexFft&) = delete;

  std::span<std::complex<double>> values();
  void run();

 private:
  struct Parts;
  std::unique_ptr<Parts> parts_;
};

}  // namespace stillmass::spectral
