#include "recording/interleaved.hpp"

#include <algorithm>
#include <bit>
#include <limits>
#include <type_traits>

namespace stillmass::recording {
namespace {

constexpr double of_full_scale = 1.0 / 2147483648.0;  // integers come aligned to the top of 32 bits

template <class Sample>
constexpr double scale = std::is_integral_v<Sample> ? of_full_scale : 1.0;

// The number of channels as a constant, where it is a common one, spares the compiler a product a sample.
template <std::size_t fixed, class Sample>
void spread(const Sample* in, std::size_t channels, double factor, double offset, std::span<double> out) {
  const std::size_t step = fixed == 0 ? channels : fixed;
  double* const to = out.data();
  for (std::size_t i = 0; i < out.size(); ++i) {
    to[i] = static_cast<double>(in[i * step]) * scale<Sample> * factor + offset;
  }
}

// On bits and without a branch, so that the compiler makes vector code of it: one more exponent carries infinity and
// what is no number into the sign, and nothing else.
template <class Bits, class Sample>
bool finite(std::span<const Sample> samples) {
  constexpr Bits sign = Bits{1} << (8 * sizeof(Bits) - 1);
  constexpr Bits infinite = std::bit_cast<Bits>(std::numeric_limits<Sample>::infinity());
  Bits seen = 0;
  for (const Sample sample : samples) seen |= (std::bit_cast<Bits>(sample) & ~sign) + (sign - infinite);
  return (seen & sign) == 0;
}

}  // namespace

Interleaved::Interleaved(const SoundReader& sound) : channels_(static_cast<std::size_t>(sound.channels())) {
  const std::size_t room = most_frames * channels_;
  switch (sound.stored()) {
    case SoundReader::Stored::integer:
      samples_.emplace<std::vector<std::int32_t>>(room);
      break;
    case SoundReader::Stored::single_precision:
      samples_.emplace<std::vector<float>>(room);
      break;
    case SoundReader::Stored::double_precision:
      samples_.emplace<std::vector<double>>(room);
      break;
  }
}

std::int64_t Interleaved::read(SoundReader& sound, std::int64_t frames) {
  frames = std::min(frames, static_cast<std::int64_t>(most_frames));
  const std::int64_t read = std::visit([&](auto& samples) { return sound.read(samples.data(), frames); }, samples_);
  const std::size_t held = static_cast<std::size_t>(read) * channels_;
  if (const auto* const floats = std::get_if<std::vector<float>>(&samples_)) {
    all_finite_ = finite<std::uint32_t>(std::span(*floats).first(held));
  } else if (const auto* const doubles = std::get_if<std::vector<double>>(&samples_)) {
    all_finite_ = finite<std::uint64_t>(std::span(*doubles).first(held));
  }
  return read;
}

void Interleaved::channel(std::size_t c, double factor, double offset, std::span<double> out) const {
  std::visit(
      [&](const auto& samples) {
        switch (channels_) {
          case 1:
            return spread<1>(samples.data() + c, channels_, factor, offset, out);
          case 2:
            return spread<2>(samples.data() + c, channels_, factor, offset, out);
          case 4:
            return spread<4>(samples.data() + c, channels_, factor, offset, out);
          case 8:
            return spread<8>(samples.data() + c, channels_, factor, offset, out);
          default:
            return spread<0>(samples.data() + c, channels_, factor, offset, out);
        }
      },
      samples_);
}

}  // namespace stillmass::recording
