// Every format of sound file that is taken, written byte by byte or by libsndfile's writer (the outside truth for
// compressed and big-endian files), and what damage to each gives.
#include <cstring>
#include <fstream>
#include <iterator>

#include <fmt/format.h>
#include <sndfile.h>

#include "stillmass/recording/reader.hpp"

#include "recording/reading.hpp"
#include "recording/wav_bytes.hpp"
#include "support/catch.hpp"

using namespace stillmass;
using namespace stillmass::tests;

namespace {

struct Format {
  const char* stated;
  int format;
  int bits;  // 0: floating point
  int most_channels = 64;
};

const Format formats[] = {
    {"WAV, 8-bit", SF_FORMAT_WAV | SF_FORMAT_PCM_U8, 8},
    {"WAV, 16-bit", SF_FORMAT_WAV | SF_FORMAT_PCM_16, 16},
    {"WAV, 24-bit", SF_FORMAT_WAV | SF_FORMAT_PCM_24, 24},
    {"WAV, 32-bit", SF_FORMAT_WAV | SF_FORMAT_PCM_32, 32},
    {"WAV, 32-bit float", SF_FORMAT_WAV | SF_FORMAT_FLOAT, 0},
    {"WAV, 64-bit float", SF_FORMAT_WAV | SF_FORMAT_DOUBLE, 0},
    {"WAV, 16-bit", SF_FORMAT_WAV | SF_FORMAT_PCM_16 | SF_ENDIAN_BIG, 16},
    {"WAV, 16-bit", SF_FORMAT_WAVEX | SF_FORMAT_PCM_16, 16},
    {"WAV, 24-bit", SF_FORMAT_WAVEX | SF_FORMAT_PCM_24, 24},
    {"WAV, 32-bit float", SF_FORMAT_WAVEX | SF_FORMAT_FLOAT, 0},
    {"RF64, 24-bit", SF_FORMAT_RF64 | SF_FORMAT_PCM_24, 24},
    {"RF64, 32-bit float", SF_FORMAT_RF64 | SF_FORMAT_FLOAT, 0},
    {"W64, 16-bit", SF_FORMAT_W64 | SF_FORMAT_PCM_16, 16},
    {"W64, 24-bit", SF_FORMAT_W64 | SF_FORMAT_PCM_24, 24},
    {"W64, 64-bit float", SF_FORMAT_W64 | SF_FORMAT_DOUBLE, 0},
    {"FLAC, 8-bit", SF_FORMAT_FLAC | SF_FORMAT_PCM_S8, 8, 8},
    {"FLAC, 16-bit", SF_FORMAT_FLAC | SF_FORMAT_PCM_16, 16, 8},
    {"FLAC, 24-bit", SF_FORMAT_FLAC | SF_FORMAT_PCM_24, 24, 8},
    {"AIFF, 8-bit", SF_FORMAT_AIFF | SF_FORMAT_PCM_S8, 8},
    {"AIFF, 16-bit", SF_FORMAT_AIFF | SF_FORMAT_PCM_16, 16},
    {"AIFF, 24-bit", SF_FORMAT_AIFF | SF_FORMAT_PCM_24, 24},
    {"AIFF, 32-bit", SF_FORMAT_AIFF | SF_FORMAT_PCM_32, 32},
    {"AIFF, 16-bit", SF_FORMAT_AIFF | SF_FORMAT_PCM_16 | SF_ENDIAN_LITTLE, 16},
    {"AIFF, 32-bit float", SF_FORMAT_AIFF | SF_FORMAT_FLOAT, 0},
    {"AIFF, 64-bit float", SF_FORMAT_AIFF | SF_FORMAT_DOUBLE, 0},
};

// The sample of that frame and channel: any stored value of the width, as a fraction of full scale.
double stored(std::int64_t frame, int channel, int bits) {
  const auto mixed = static_cast<std::uint64_t>(frame * 64 + channel + 1) * 0x9E3779B97F4A7C15ULL;
  const int width = bits == 0 ? 24 : bits;  // floats hold these exactly
  const auto level = static_cast<std::int64_t>(mixed >> (64 - width)) - (std::int64_t{1} << (width - 1));
  return static_cast<double>(level) / static_cast<double>(std::int64_t{1} << (width - 1));
}

void write_sound(const std::filesystem::path& path, const Format& format, int channels, std::int64_t frames) {
  SF_INFO info{};
  info.samplerate = 8000;
  info.channels = channels;
  info.format = format.format;
  SNDFILE* file = sf_open(path.c_str(), SFM_WRITE, &info);
  REQUIRE(file != nullptr);
  std::vector<int> whole;
  std::vector<double> real;
  for (std::int64_t i = 0; i < frames; ++i) {
    for (int c = 0; c < channels; ++c) {
      const double value = stored(i, c, format.bits);
      whole.push_back(static_cast<int>(value * 2147483648.0));  // libsndfile takes integers of 32 bits, left-justified
      real.push_back(value);
    }
  }
  const auto written =
      format.bits == 0 ? sf_writef_double(file, real.data(), frames) : sf_writef_int(file, whole.data(), frames);
  CHECK(written == frames);
  CHECK(sf_close(file) == 0);
}

std::string bytes_of(const std::filesystem::path& path) {
  std::ifstream in(path, std::ios::binary);
  return {std::istreambuf_iterator<char>(in), {}};
}

void check_samples(recording::Reader& reader, int bits, std::size_t frames) {
  const auto samples = all_samples(reader, 777);
  for (std::size_t c = 0; c < samples.size(); ++c) {
    REQUIRE(samples[c].size() == frames);
    std::size_t wrong = 0;
    for (std::size_t i = 0; i < frames; ++i) {
      wrong += samples[c][i] == stored(static_cast<std::int64_t>(i), static_cast<int>(c), bits) ? 0 : 1;
    }
    CHECK(wrong == 0);
  }
}

std::string big(std::uint64_t value, int bytes) {
  const std::string turned = little(value, bytes);
  return {turned.rbegin(), turned.rend()};
}

// The content with those bytes at that place.
std::string with(std::string content, std::size_t at, const std::string& bytes) {
  REQUIRE(at + bytes.size() <= content.size());
  return content.replace(at, bytes.size(), bytes);
}

std::string written(const Format& format, int channels, std::int64_t frames) {
  const TemporaryFolder folder;
  write_sound(folder / "sound", format, channels, frames);
  return bytes_of(folder / "sound");
}

const Format& named(const char* stated) {
  for (const Format& format : formats) {
    if (std::strcmp(format.stated, stated) == 0) return format;
  }
  FAIL("no such format");
  return formats[0];
}

struct Damage {
  const char* claim;
  std::string content;
  std::size_t frames;   // that are read
  double from_s, to_s;  // of the finding; negative: none
  int bits;
};

}  // namespace

TEST_CASE("every sound format is read to the last bit, from 1 to 64 channels") {
  const TemporaryFolder folder;
  int files = 0;
  for (const Format& format : formats) {
    for (const int channels : {1, 2, 3, 8, 64}) {
      if (channels > format.most_channels) continue;
      const auto path = folder / fmt::format("{}.sound", files++);
      constexpr std::size_t frames = 1500;
      write_sound(path, format, channels, frames);
      INFO(format.stated << ", " << channels << " channels");
      const auto reader = recording::open(path);
      const auto& recording = reader->recording();
      CHECK(recording.format == format.stated);
      CHECK(recording.rate_hz == 8000.0);
      REQUIRE(recording.channels.size() == static_cast<std::size_t>(channels));
      CHECK(found(recording.findings, base::Code::truncated) == nullptr);
      CHECK(recording.channels[0].stored_step.has_value() == (format.bits > 0));
      if (format.bits > 0) CHECK(*recording.channels[0].stored_step == std::ldexp(1.0, 1 - format.bits));
      check_samples(*reader, format.bits, frames);
      auto second = reader->second();
      recording::Chunk chunk;
      second->seek(1234);
      REQUIRE(second->next(chunk, 1));
      CHECK(chunk.channel(0)[0] == stored(1234, 0, format.bits));
    }
  }
}

TEST_CASE("BW64, the RF64 of ITU-R BS.2088, is read as well") {
  Opened wav(with(written(named("RF64, 24-bit"), 2, 1000), 0, "BW64"));
  check_samples(*wav.reader, 24, 1000);
}

TEST_CASE("each kind of cut or lying sound file is read as far as it goes and says from when to when") {
  // Headers as libsndfile writes them: RIFF of 16-bit data at 44; AIFF: COMM at 12 with its frames at 22, SSND at 38
  // with its size at 42; W64: data at 80 with its size at 96; RF64: ds64 at 12 with the size of the data at 28.
  const std::string aiff = written(named("AIFF, 16-bit"), 2, 4000);
  const std::string aifc = written(named("AIFF, 32-bit float"), 2, 4000);
  const std::string w64 = written(named("W64, 24-bit"), 2, 4000);
  const std::string rf64 = written(named("RF64, 24-bit"), 2, 4000);
  const std::string flac = written(named("FLAC, 24-bit"), 2, 20000);
  REQUIRE(aiff.compare(38, 4, "SSND") == 0);
  REQUIRE(w64.compare(80, 4, "data") == 0);
  REQUIRE(rf64.compare(12, 4, "ds64") == 0);
  const std::string ones(8, '\xFF');
  const std::string zeros(8, '\0');
  const std::size_t w64_data = w64.size() - 4000 * 6;
  const std::size_t rf64_data = rf64.size() - 4000 * 6;
  const std::vector<Damage> damages{
      {"AIFF cut in half", aiff.substr(0, 54 + 2000 * 4), 2000, 0.25, 0.5, 16},
      {"AIFF cut in a frame", aiff.substr(0, 54 + 2000 * 4 + 3), 2000, 0.25, 0.5, 16},
      {"AIFF whose SSND was never completed", with(aiff, 42, zeros.substr(4)), 4000, -1, -1, 16},
      {"AIFF whose SSND size is all ones", with(aiff, 42, ones.substr(4)), 4000, -1, -1, 16},
      {"AIFF whose COMM states no frames", with(aiff, 22, zeros.substr(4)), 4000, -1, -1, 16},
      {"AIFF whose COMM states too many frames", with(aiff, 22, big(1000000, 4)), 4000, -1, -1, 16},
      {"AIFF whose COMM and SSND state twice the frames", with(with(aiff, 22, big(8000, 4)), 42, big(8 + 8000 * 4, 4)),
       4000, 0.5, 1.0, 16},
      {"floating AIFC cut", aifc.substr(0, aifc.size() - 1000 * 8), 3000, 0.375, 0.5, 0},
      {"W64 cut", w64.substr(0, w64_data + 1000 * 6), 1000, 0.125, 0.5, 24},
      {"W64 never completed", with(w64, 96, zeros), 4000, 0.5, -1, 24},
      {"W64 of all ones", with(w64, 96, ones), 4000, 0.5, -1, 24},
      {"W64 that promises twice the data", with(w64, 96, little(24 + 8000 * 6, 8)), 4000, 0.5, 1.0, 24},
      {"RF64 cut", rf64.substr(0, rf64_data + 1000 * 6), 1000, 0.125, 0.5, 24},
      {"RF64 never completed", with(rf64, 28, zeros), 4000, 0.5, -1, 24},
      {"RF64 of all ones", with(rf64, 28, ones), 4000, 0.5, -1, 24},
      {"RF64 that promises twice the data", with(rf64, 28, little(8000 * 6, 8)), 4000, 0.5, 1.0, 24},
  };
  for (const Damage& damage : damages) {
    INFO(damage.claim);
    Opened sound(damage.content);
    REQUIRE(sound.recording().frames == static_cast<std::int64_t>(damage.frames));
    check_samples(*sound.reader, damage.bits, damage.frames);
    const auto* finding = found(sound.recording().findings, base::Code::truncated);
    REQUIRE((finding != nullptr) == (damage.from_s >= 0.0));
    if (finding == nullptr) continue;
    CHECK(*finding->from_s == Approx(damage.from_s).epsilon(1e-12));
    CHECK(finding->to_s.has_value() == (damage.to_s >= 0.0));
    if (finding->to_s) CHECK(*finding->to_s == Approx(damage.to_s).epsilon(1e-12));
  }
}

TEST_CASE("a FLAC without its end or its length is read to the last whole block, forwards and by seeking") {
  const std::string flac = written(named("FLAC, 24-bit"), 2, 20000);
  // STREAMINFO stands at 8; its 36 bits of total samples begin in the low half of byte 13 (RFC 9639, 8.2).
  std::string unmeasured = flac;
  unmeasured[8 + 13] = static_cast<char>(unmeasured[8 + 13] & 0xF0);
  unmeasured = with(unmeasured, 8 + 14, std::string(4, '\0'));
  Opened whole(unmeasured);
  CHECK(whole.recording().frames == 20000);
  CHECK(found(whole.recording().findings, base::Code::truncated) == nullptr);
  check_samples(*whole.reader, 24, 20000);

  Opened cut(flac.substr(0, flac.size() / 2));
  const auto frames = static_cast<std::size_t>(cut.recording().frames);
  CHECK(frames % 4096 == 0);  // libsndfile writes blocks of 4096 frames
  CHECK(frames >= 8192);
  check_samples(*cut.reader, 24, frames);
  const auto* finding = found(cut.recording().findings, base::Code::truncated);
  REQUIRE(finding != nullptr);
  CHECK(*finding->from_s == Approx(static_cast<double>(frames) / 8000.0));
  CHECK(*finding->to_s == Approx(2.5));
  recording::Chunk chunk;
  auto second = cut.reader->second();
  for (const std::int64_t at : {std::int64_t{8000}, std::int64_t{10}, std::int64_t{5000}}) {
    second->seek(at);
    REQUIRE(second->next(chunk, 2));
    CHECK(chunk.channel(1)[1] == stored(at + 1, 1, 24));
  }
}

TEST_CASE("a FLAC with a hole is refused from there on, in words that say when") {
  std::string flac = written(named("FLAC, 24-bit"), 2, 20000);
  std::fill_n(flac.begin() + static_cast<std::ptrdiff_t>(flac.size() / 2), 40, '\0');
  Opened sound(flac);
  try {
    all_samples(*sound.reader, 1000);
    FAIL_CHECK("read through the hole");
  } catch (const base::Error& error) {
    CHECK(error.kind == base::ErrorKind::file);
    INFO(error.problem);
    CHECK(error.problem.find("cannot be read from 1.024 s on") != std::string::npos);
    CHECK(error.remedy.find("--to") != std::string::npos);
  }
}

TEST_CASE("a header that contradicts itself about its frames is read as channels and bits have it") {
  for (const int align : {0, 1, 3}) {
    WavBytes wav = wav16({1, 2, 3, 4});
    std::string content = with(wav.file(), 32, little(static_cast<unsigned>(align), 2));
    INFO(align);
    Opened sound(content);
    CHECK(sound.recording().frames == 4);
    CHECK(found(sound.recording().findings, base::Code::truncated) == nullptr);
    CHECK(all_samples(*sound.reader)[0][3] == 4.0 / 32768.0);
  }
}
