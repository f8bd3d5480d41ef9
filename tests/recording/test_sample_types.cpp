#include <bit>
#include <cmath>
#include <cstdint>
#include <limits>

#include "stillmass/recording/reader.hpp"

#include "recording/reading.hpp"
#include "recording/wav_bytes.hpp"
#include "support/catch.hpp"

using namespace stillmass;
using namespace stillmass::tests;
using recording::OpenOptions;

namespace {

constexpr int frames = 1500;  // more than are read at once

struct Type {
  int tag;
  int bits;
};

// Sample number n of the file, as stored; spread over the whole range.
std::int64_t stored(int n, int bits) {
  const auto word = static_cast<std::uint64_t>(n + 1) * 0x9E3779B97F4A7C15U;
  return static_cast<std::int64_t>(word) >> (64 - bits);
}

double real(int n) { return std::ldexp(static_cast<double>(stored(n, 53)), -60 + n % 9); }

}  // namespace

TEST_CASE("samples of every type come out exactly, whatever the number of channels") {
  for (const Type type : {Type{1, 8}, Type{1, 16}, Type{1, 24}, Type{1, 32}, Type{3, 32}, Type{3, 64}}) {
    for (const int channels : {1, 2, 3, 4, 5, 8, 9}) {
      WavBytes wav;
      wav.tag = type.tag;
      wav.bits = type.bits;
      wav.channels = channels;
      std::vector<std::vector<double>> expected(static_cast<std::size_t>(channels));
      for (int n = 0; n < frames * channels; ++n) {
        auto& of_channel = expected[static_cast<std::size_t>(n % channels)];
        if (type.tag == 1) {
          const std::int64_t sample = stored(n, type.bits);
          wav.add(type.bits == 8 ? sample + 128 : sample);  // WAV stores 8 bits without a sign
          of_channel.push_back(std::ldexp(static_cast<double>(sample), 1 - type.bits));
        } else if (type.bits == 32) {
          wav.add(static_cast<float>(real(n)));
          of_channel.push_back(static_cast<double>(static_cast<float>(real(n))));
        } else {
          wav.data += little(std::bit_cast<std::uint64_t>(real(n)), 8);
          of_channel.push_back(real(n));
        }
      }
      CAPTURE(type.tag, type.bits, channels);
      Opened opened(wav.file());
      CHECK(all_samples(*opened.reader, 700) == expected);
    }
  }
}

TEST_CASE("what is no finite number in a float file is left out, however deep in the file it stands") {
  for (const int bits : {32, 64}) {
    for (const double bad : {std::numeric_limits<double>::infinity(), -std::numeric_limits<double>::infinity(),
                             std::numeric_limits<double>::quiet_NaN()}) {
      WavBytes wav;
      wav.tag = 3;
      wav.bits = bits;
      wav.channels = 3;
      for (int n = 0; n < 3 * frames; ++n) {
        const double sample = n == 3 * 1400 + 1 ? bad : std::numeric_limits<float>::max();  // channel 2
        if (bits == 32) {
          wav.add(static_cast<float>(sample));
        } else {
          wav.data += little(std::bit_cast<std::uint64_t>(sample), 8);
        }
      }
      CAPTURE(bits, bad);
      Opened opened(wav.file());
      recording::Chunk chunk;
      REQUIRE(opened.reader->next(chunk, frames));
      REQUIRE(chunk.valid.size() == 3);
      CHECK(chunk.is_valid(0, {0, frames}));
      CHECK(chunk.is_valid(2, {0, frames}));
      CHECK(chunk.is_valid(1, {0, 1400}));
      CHECK(chunk.is_valid(1, {1401, frames}));
      CHECK_FALSE(chunk.is_valid(1, {1400, 1401}));
    }
  }
}

TEST_CASE("a sample that its scale takes beyond the range of numbers is left out") {
  OpenOptions options;
  recording::ChannelSetting setting;
  setting.scale = 1e300;
  options.channels = {setting};
  WavBytes wav;
  wav.tag = 3;
  wav.bits = 32;
  for (const float sample : {1.0F, 1e30F, 2.0F}) wav.add(sample);
  Opened opened(wav.file(), options);
  recording::Chunk chunk;
  REQUIRE(opened.reader->next(chunk, 3));
  CHECK(chunk.is_valid(0, {0, 1}));
  CHECK_FALSE(chunk.is_valid(0, {1, 2}));
  CHECK(chunk.is_valid(0, {2, 3}));
}
