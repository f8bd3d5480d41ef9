#include "recording/interleaved.hpp"

#include <algorithm>
#include <bit>
#include <cmath>
#include <limits>
#include <type_traits>

#ifdef __SSE2__
#include <emmintrin.h>
#endif

namespace stillmass::recording {
namespace {

constexpr double of_full_scale = 1.0 / 2147483648.0;  // integers come aligned to the top of 32 bits

template <class Sample>
constexpr double scale = std::is_integral_v<Sample> ? of_full_scale : 1.0;

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

template <class Sample>
double scaled(Sample sample, const Interleaved::Target& target) {
  return static_cast<double>(sample) * scale<Sample> * target.factor + target.offset;
}

template <class Sample>
void spread_one(const Sample* in, std::size_t step, std::size_t frames, const Interleaved::Target& target) {
  for (std::size_t i = 0; i < frames; ++i) target.out[i] = scaled(in[i * step], target);
}

#ifdef __SSE2__
// Two frames of four channels at a time, turned in registers: the same operations in the same order, so the same bits.
__m128 four(const float* in) { return _mm_loadu_ps(in); }
__m128i four(const std::int32_t* in) { return _mm_loadu_si128(reinterpret_cast<const __m128i*>(in)); }
__m128 low_pairs(__m128 a, __m128 b) { return _mm_unpacklo_ps(a, b); }
__m128i low_pairs(__m128i a, __m128i b) { return _mm_unpacklo_epi32(a, b); }
__m128 high_pairs(__m128 a, __m128 b) { return _mm_unpackhi_ps(a, b); }
__m128i high_pairs(__m128i a, __m128i b) { return _mm_unpackhi_epi32(a, b); }
__m128d first_pair(__m128 x) { return _mm_cvtps_pd(x); }
__m128d first_pair(__m128i x) { return _mm_mul_pd(_mm_cvtepi32_pd(x), _mm_set1_pd(of_full_scale)); }
__m128d second_pair(__m128 x) { return first_pair(_mm_movehl_ps(x, x)); }
__m128d second_pair(__m128i x) { return first_pair(_mm_unpackhi_epi64(x, x)); }

// The same as in `finite`, on four samples.
__m128i overflow(__m128 x) {
  const __m128i size = _mm_and_si128(_mm_castps_si128(x), _mm_set1_epi32(0x7FFFFFFF));
  return _mm_add_epi32(size, _mm_set1_epi32(0x00800000));
}
__m128i overflow(__m128i) { return _mm_setzero_si128(); }

// False where a sample is not finite.
template <class Sample>
bool spread_four(const Sample* in, std::size_t step, std::size_t frames, const Interleaved::Target* targets) {
  __m128i seen = _mm_setzero_si128();
  std::size_t i = 0;
  // Copies, since the compiler must take it that what is written could be the targets themselves.
  const Interleaved::Target to[4] = {targets[0], targets[1], targets[2], targets[3]};
  const __m128d factor[4] = {_mm_set1_pd(to[0].factor), _mm_set1_pd(to[1].factor), _mm_set1_pd(to[2].factor),
                             _mm_set1_pd(to[3].factor)};
  const __m128d offset[4] = {_mm_set1_pd(to[0].offset), _mm_set1_pd(to[1].offset), _mm_set1_pd(to[2].offset),
                             _mm_set1_pd(to[3].offset)};
  const auto put = [&](std::size_t c, __m128d pair) {
    _mm_storeu_pd(to[c].out + i, _mm_add_pd(_mm_mul_pd(pair, factor[c]), offset[c]));
  };
  for (; i + 2 <= frames; i += 2) {
    const auto a = four(in + i * step);
    const auto b = four(in + (i + 1) * step);
    seen = _mm_or_si128(seen, _mm_or_si128(overflow(a), overflow(b)));
    const auto low = low_pairs(a, b);
    const auto high = high_pairs(a, b);
    put(0, first_pair(low));
    put(1, second_pair(low));
    put(2, first_pair(high));
    put(3, second_pair(high));
  }
  bool is_finite = _mm_movemask_ps(_mm_castsi128_ps(seen)) == 0;
  for (; i < frames; ++i) {
    for (std::size_t c = 0; c < 4; ++c) {
      targets[c].out[i] = scaled(in[i * step + c], targets[c]);
      is_finite = is_finite && std::isfinite(static_cast<double>(in[i * step + c]));
    }
  }
  return is_finite;
}
#endif

template <class Sample>
bool spread(const Sample* in, std::size_t channels, std::size_t frames, std::span<const Interleaved::Target> targets) {
  bool is_finite = true;
  std::size_t c = 0;
#ifdef __SSE2__
  if constexpr (!std::is_same_v<Sample, double>) {
    for (; c + 4 <= channels; c += 4)
      is_finite = spread_four(in + c, channels, frames, targets.data() + c) && is_finite;
  }
#endif
  if constexpr (std::is_floating_point_v<Sample>) {
    using Bits = std::conditional_t<std::is_same_v<Sample, float>, std::uint32_t, std::uint64_t>;
    if (c < channels) is_finite = finite<Bits>(std::span(in, frames * channels)) && is_finite;
  }
  for (; c < channels; ++c) spread_one(in + c, channels, frames, targets[c]);
  return is_finite;
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
  return read;
}

bool Interleaved::to(std::span<const Target> targets, std::size_t frames) const {
  return std::visit([&](const auto& samples) { return spread(samples.data(), channels_, frames, targets); }, samples_);
}

}  // namespace stillmass::recording
