#include "stillmass/spectral/block_transform.hpp"

#include <utility>

#include "spectral/fft.hpp"

namespace stillmass::spectral {

struct BlockTransform::Parts {
  std::shared_ptr<const std::vector<double>> weights;
  RealFft fft;
};

BlockTransform::BlockTransform(std::vector<double> weights) {
  const std::size_t n = weights.size();
  parts_ = std::make_unique<Parts>(Parts{std::make_shared<const std::vector<double>>(std::move(weights)), RealFft(n)});
}

BlockTransform::~BlockTransform() = default;
BlockTransform::BlockTransform(const BlockTransform& other) : parts_(std::make_unique<Parts>(*other.parts_)) {}
BlockTransform::BlockTransform(BlockTransform&&) noexcept = default;

std::size_t BlockTransform::length() const { return parts_->weights->size(); }

std::span<const double> BlockTransform::weights() const { return *parts_->weights; }

std::span<const std::complex<double>> BlockTransform::operator()(std::span<const double> block, double offset) {
  const double* w = parts_->weights->data();
  const auto input = parts_->fft.input();
  for (std::size_t i = 0; i < input.size(); ++i) input[i] = w[i] * (block[i] - offset);
  return parts_->fft.run();
}

std::vector<double> density_factors(std::size_t length, double rate_hz, double norm) {
  std::vector<double> factors(length / 2 + 1, 2.0 / (rate_hz * norm));
  factors.front() *= 0.5;
  if (length % 2 == 0) factors.back() *= 0.5;
  return factors;
}

}  // namespace stillmass::spectral
