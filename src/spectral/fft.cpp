#include "spectral/fft.hpp"

#include <limits>
#include <mutex>
#include <new>

#include <fftw3.h>

#include "stillmass/base/error.hpp"

namespace stillmass::spectral {

namespace {

/// FFTW's planner is not thread-safe; running a plan is.
std::mutex& planner() {
  static std::mutex mutex;
  return mutex;
}

int checked_length(std::size_t n) {
  if (n == 0 || n > static_cast<std::size_t>(std::numeric_limits<int>::max())) {
    throw base::Error(base::ErrorKind::internal, "fft", "a block of " + std::to_string(n) + " samples");
  }
  return static_cast<int>(n);
}

template <class T>
T* aligned(std::size_t n) {
  void* memory = fftw_malloc(n * sizeof(T));
  if (memory == nullptr) throw std::bad_alloc();
  return new (memory) T[n]{};
}

fftw_complex* raw(std::complex<double>* values) { return reinterpret_cast<fftw_complex*>(values); }

}  // namespace

void RealFft::Free::operator()(void* memory) const noexcept { fftw_free(memory); }

struct RealFft::Plan {
  Plan(int n, double* input, std::complex<double>* output) {
    const std::lock_guard lock(planner());
    plan = fftw_plan_dft_r2c_1d(n, input, raw(output), FFTW_ESTIMATE | FFTW_PRESERVE_INPUT);
  }
  ~Plan() {
    const std::lock_guard lock(planner());
    fftw_destroy_plan(plan);
  }
  Plan(const Plan&) = delete;
  Plan& operator=(const Plan&) = delete;

  fftw_plan plan = nullptr;
};

RealFft::RealFft(std::size_t n)
    : n_(static_cast<std::size_t>(checked_length(n))),
      input_(aligned<double>(n)),
      output_(aligned<std::complex<double>>(n / 2 + 1)),
      plan_(std::make_shared<const Plan>(checked_length(n), input_.get(), output_.get())) {}

RealFft::RealFft(const RealFft& other)
    : n_(other.n_),
      input_(aligned<double>(n_)),
      output_(aligned<std::complex<double>>(n_ / 2 + 1)),
      plan_(other.plan_) {}

std::span<const std::complex<double>> RealFft::run() {
  fftw_execute_dft_r2c(plan_->plan, input_.get(), raw(output_.get()));
  return {output_.get(), n_ / 2 + 1};
}

struct ComplexFft::Parts {
  explicit Parts(std::size_t count) : n(count), values(aligned<std::complex<double>>(count)) {
    const std::lock_guard lock(planner());
    plan = fftw_plan_dft_1d(static_cast<int>(n), raw(values), raw(values), FFTW_FORWARD, FFTW_ESTIMATE);
  }
  ~Parts() {
    {
      const std::lock_guard lock(planner());
      fftw_destroy_plan(plan);
    }
    fftw_free(values);
  }
  Parts(const Parts&) = delete;
  Parts& operator=(const Parts&) = delete;

  std::size_t n;
  std::complex<double>* values;
  fftw_plan plan = nullptr;
};

ComplexFft::ComplexFft(std::size_t n) : parts_(std::make_unique<Parts>(static_cast<std::size_t>(checked_length(n)))) {}
ComplexFft::~ComplexFft() = default;

std::span<std::complex<double>> ComplexFft::values() { return {parts_->values, parts_->n}; }

void ComplexFft::run() { fftw_execute(parts_->plan); }

}  // namespace stillmass::spectral
