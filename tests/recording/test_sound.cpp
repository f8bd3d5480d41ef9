#include <fstream>
#include <limits>

#include <sys/stat.h>

#include "stillmass/recording/reader.hpp"

#include "recording/reading.hpp"
#include "recording/wav_bytes.hpp"
#include "support/catch.hpp"

using namespace stillmass;
using namespace stillmass::tests;
using recording::OpenOptions;

TEST_CASE("16-bit samples come as fractions of full scale times the factor") {
  OpenOptions options;
  recording::ChannelSetting setting;
  setting.unit = base::unit_named("g");
  setting.scale = 50.0;
  options.channels = {setting};
  Opened wav(wav16({0, 1, -32768, 32767}).file(), options);
  const auto samples = all_samples(*wav.reader)[0];
  const double factor = 50.0 * base::standard_gravity;
  CHECK(wav.recording().format == "WAV, 16-bit");
  CHECK(wav.recording().rate_hz == 1000.0);
  CHECK(samples[0] == 0.0);
  CHECK(samples[1] == factor / 32768.0);  // exact: a power of two
  CHECK(samples[2] == -factor);
  CHECK(samples[3] == factor * (32767.0 / 32768.0));
  CHECK(*wav.recording().channels[0].stored_step == factor / 32768.0);
  CHECK(*wav.recording().channels[0].full_scale == factor);
  CHECK(wav.recording().channels[0].unit_known);
  CHECK(wav.recording().findings.empty());
}

TEST_CASE("24-bit and float samples of several channels are told apart") {
  WavBytes wide;
  wide.bits = 24;
  wide.channels = 2;
  for (int i = 0; i < 5; ++i) {
    wide.add(std::int64_t{1000 * i});
    wide.add(std::int64_t{-7 * i});
  }
  Opened two(wide.file());
  const auto samples = all_samples(*two.reader, 2);
  CHECK(two.recording().format == "WAV, 24-bit");
  CHECK(samples[0][3] == 3000.0 / 8388608.0);
  CHECK(samples[1][4] == -28.0 / 8388608.0);
  CHECK(two.recording().channels[1].name == "channel 2");
  CHECK(found(two.recording().findings, base::Code::unit_assumed) != nullptr);

  WavBytes floats;
  floats.tag = 3;
  floats.bits = 32;
  floats.add(0.1F);
  floats.add(std::numeric_limits<float>::quiet_NaN());
  floats.add(-12.5F);
  Opened one(floats.file());
  CHECK(all_samples(*one.reader)[0] == std::vector<double>{static_cast<double>(0.1F), 0.0, -12.5});
  CHECK_FALSE(one.recording().channels[0].full_scale.has_value());
  const auto valid = all_valid(*one.reader)[0];
  REQUIRE(valid.size() == 2);
  CHECK(valid[0].end == 1);
  CHECK(valid[1].begin == 2);
}

TEST_CASE("sensitivity and full scale give the factor") {
  OpenOptions options;
  recording::ChannelSetting setting;
  setting.unit = base::unit_named("g");
  setting.sensitivity_mv_per_unit = 100.0;
  setting.full_scale_v = 5.0;
  options.channels = {setting};
  Opened wav(wav16({16384, 0}).file(), options);
  CHECK(all_samples(*wav.reader)[0][0] == Approx(25.0 * base::standard_gravity).epsilon(1e-15));
  options.channels[0].scale = 2.0;
  CHECK(open_error(wav16({1, 2}).file(), options).kind == base::ErrorKind::usage);
  options.channels[0].scale.reset();
  options.channels[0].full_scale_v.reset();
  CHECK(open_error(wav16({1, 2}).file(), options).kind == base::ErrorKind::usage);
}

TEST_CASE("a channel that is not there is a faulty call") {
  OpenOptions options;
  options.channels.resize(1);
  options.channels[0].index = 2;
  const auto error = open_error(wav16({1, 2}).file(), options);
  CHECK(error.kind == base::ErrorKind::usage);
  CHECK(error.problem.find("channel 2 is not there") != std::string::npos);
}

TEST_CASE("a truncated WAV is read as far as it goes and says what is missing") {
  Opened wav(wav16(std::vector<int>(1500, 7)).with_size(4000));
  CHECK(wav.recording().frames == 1500);
  const auto* finding = found(wav.recording().findings, base::Code::truncated);
  REQUIRE(finding != nullptr);
  CHECK(finding->from_s == 1.5);
  CHECK(finding->to_s == 2.0);
  CHECK(all_samples(*wav.reader)[0].size() == 1500);
}

TEST_CASE("a WAV whose header was never completed is read to its end") {
  for (const std::uint64_t size : {std::uint64_t{0}, std::uint64_t{0xFFFFFFFF}}) {
    Opened wav(wav16({1, 2, 3, 4, 5}).with_size(size));
    CHECK(wav.recording().frames == 5);
    CHECK(all_samples(*wav.reader)[0][4] == 5.0 / 32768.0);
  }
}

TEST_CASE("a RIFF of more than 4 GiB with a wrapped size is read whole") {
  // A sparse file: the samples are zeros except for the last, the declared size is the real one less 2^32.
  const TemporaryFolder folder;
  const auto file = folder / "long.wav";
  const std::uint64_t bytes = (std::uint64_t{1} << 32) + 2000;
  {
    std::ofstream out(file, std::ios::binary);
    const std::string head = wav16({}).with_size(2000);
    out << head;
    out.seekp(static_cast<std::streamoff>(head.size() + bytes - 2));
    out << little(16384, 2);
  }
  const auto reader = recording::open(file);
  const auto frames = static_cast<std::int64_t>(bytes / 2);
  CHECK(reader->recording().frames == frames);
  CHECK(found(reader->recording().findings, base::Code::truncated) == nullptr);
  recording::Chunk chunk;
  reader->seek(frames - 1);
  REQUIRE(reader->next(chunk, 10));
  CHECK(chunk.channel(0)[0] == 0.5);
}

TEST_CASE("RF64 is read like WAV") {
  Opened wav(wav16({1, 2, 3}).rf64());
  CHECK(wav.recording().format == "RF64, 16-bit");
  CHECK(wav.recording().frames == 3);
}

TEST_CASE("a WAV without samples is an error of the file") {
  const auto error = open_error(wav16({}).file());
  CHECK(error.kind == base::ErrorKind::file);
  CHECK(error.problem.find("no samples") != std::string::npos);
}

TEST_CASE("chunks, seeking and second handles give the same samples") {
  std::vector<int> stored;
  for (int i = 0; i < 5000; ++i) stored.push_back((i * 7919) % 30000 - 15000);
  Opened wav(wav16(stored).file());
  const auto whole = all_samples(*wav.reader, 5000)[0];
  CHECK(all_samples(*wav.reader, 37)[0] == whole);
  auto second = wav.reader->second();
  recording::Chunk chunk;
  for (const std::int64_t at : {std::int64_t{0}, std::int64_t{4999}, std::int64_t{123}, std::int64_t{2500}}) {
    second->seek(at);
    REQUIRE(second->next(chunk, 10));
    CHECK(chunk.first_frame == at);
    for (std::size_t i = 0; i < chunk.frames; ++i) {
      CHECK(chunk.channel(0)[i] == whole[static_cast<std::size_t>(at) + i]);
    }
  }
  second->seek(5000);
  CHECK_FALSE(second->next(chunk, 10));
}

TEST_CASE("only regular files with something in them are opened") {
  const TemporaryFolder folder;
  const auto problem = [](const std::filesystem::path& file) {
    try {
      recording::open(file);
    } catch (const base::Error& error) {
      CHECK(error.kind == base::ErrorKind::file);
      return error.problem;
    }
    return std::string();
  };
  CHECK(problem(folder.path()).find("folder") != std::string::npos);
  CHECK(problem(folder / "none.wav").find("cannot be opened") != std::string::npos);
  REQUIRE(mkfifo((folder / "pipe").c_str(), 0600) == 0);
  CHECK(problem(folder / "pipe").find("pipe") != std::string::npos);
  CHECK(problem("/dev/null").find("device") != std::string::npos);
  write_file(folder / "empty.wav", "");
  CHECK(problem(folder / "empty.wav") == "is empty");
}

TEST_CASE("the content decides, not the name") {
  const TemporaryFolder folder;
  write_file(folder / "table.wav", "time [s],a [g]\n0.0,1\n0.1,2\n0.2,3\n");
  CHECK(recording::open(folder / "table.wav")->recording().channels[0].name == "a");
  write_file(folder / "sound.csv", wav16({1, 2, 3}).file());
  CHECK(recording::open(folder / "sound.csv")->recording().format == "WAV, 16-bit");
  std::string noise;
  for (int i = 0; i < 5000; ++i) noise.push_back(static_cast<char>((i * i * 31 + 7 * i) % 256));
  CHECK(open_error(noise).problem.find("neither a sound file nor text") != std::string::npos);
}
