#include "stillmass/recording/writer.hpp"

#include <algorithm>
#include <charconv>
#include <cmath>
#include <cstdint>
#include <cstdio>
#include <cstring>
#include <memory>
#include <string_view>

#include <sndfile.h>

#include "stillmass/base/error.hpp"
#include "stillmass/base/output.hpp"
#include "stillmass/base/text.hpp"

namespace stillmass::recording {
namespace {

[[noreturn]] void refuse(const std::filesystem::path& file, const char* what) {
  throw base::usage_error(base::printable(file.string()), what);
}

std::size_t frames_of(const std::filesystem::path& file, const Samples& samples) {
  if (samples.channels.empty()) refuse(file, "a recording has at least one channel");
  const std::size_t frames = samples.channels.front().size();
  for (const auto& channel : samples.channels) {
    if (channel.size() != frames) refuse(file, "all channels of a recording have the same number of samples");
  }
  return frames;
}

// A file in memory for libsndfile, so that it reaches the disk whole or not at all.
struct Memory {
  std::string bytes;
  std::size_t at = 0;
};

sf_count_t length(void* user) { return static_cast<sf_count_t>(static_cast<Memory*>(user)->bytes.size()); }

sf_count_t seek(sf_count_t offset, int whence, void* user) {
  auto& memory = *static_cast<Memory*>(user);
  const sf_count_t from = whence == SEEK_SET   ? 0
                          : whence == SEEK_CUR ? static_cast<sf_count_t>(memory.at)
                                               : static_cast<sf_count_t>(memory.bytes.size());
  if (from + offset < 0) return -1;
  memory.at = static_cast<std::size_t>(from + offset);
  return from + offset;
}

sf_count_t read(void* target, sf_count_t count, void* user) {
  auto& memory = *static_cast<Memory*>(user);
  if (memory.at >= memory.bytes.size()) return 0;
  const std::size_t n = std::min(static_cast<std::size_t>(count), memory.bytes.size() - memory.at);
  std::memcpy(target, memory.bytes.data() + memory.at, n);
  memory.at += n;
  return static_cast<sf_count_t>(n);
}

sf_count_t write(const void* source, sf_count_t count, void* user) {
  auto& memory = *static_cast<Memory*>(user);
  const auto n = static_cast<std::size_t>(count);
  if (memory.at + n > memory.bytes.size()) memory.bytes.resize(memory.at + n);
  std::memcpy(memory.bytes.data() + memory.at, source, n);
  memory.at += n;
  return count;
}

sf_count_t tell(void* user) { return static_cast<sf_count_t>(static_cast<Memory*>(user)->at); }

// `put(SNDFILE*, interleaved)` hands the samples over in the type the format asks for.
template <class Stored, class Convert, class Put>
void write_sound(const std::filesystem::path& file, const Samples& samples, int format, Convert convert, Put put) {
  const std::size_t frames = frames_of(file, samples);
  const std::size_t channels = samples.channels.size();
  if (!(samples.rate_hz >= 1.0 && samples.rate_hz < 1e9 && samples.rate_hz == std::floor(samples.rate_hz))) {
    refuse(file, "a WAV file holds whole sampling rates only");
  }
  std::vector<Stored> interleaved(frames * channels);
  for (std::size_t c = 0; c < channels; ++c) {
    for (std::size_t i = 0; i < frames; ++i) interleaved[i * channels + c] = convert(samples.channels[c][i]);
  }

  SF_INFO info{};
  info.samplerate = static_cast<int>(samples.rate_hz);
  info.channels = static_cast<int>(channels);
  info.format = SF_FORMAT_WAV | format;
  Memory memory;
  SF_VIRTUAL_IO access{length, seek, read, write, tell};
  const std::unique_ptr<SNDFILE, int (*)(SNDFILE*)> sound(sf_open_virtual(&access, SFM_WRITE, &info, &memory),
                                                          sf_close);
  if (!sound)
    throw base::file_error(base::printable(file.string()), "cannot be made: " + std::string(sf_strerror(nullptr)));
  // The peak chunk of float files carries the time of day: two writes would differ.
  sf_command(sound.get(), SFC_SET_ADD_PEAK_CHUNK, nullptr, SF_FALSE);
  if (put(sound.get(), interleaved.data(), static_cast<sf_count_t>(frames)) != static_cast<sf_count_t>(frames)) {
    throw base::file_error(base::printable(file.string()), "cannot be made: " + std::string(sf_strerror(sound.get())));
  }
  sf_write_sync(sound.get());
  sf_command(sound.get(), SFC_UPDATE_HEADER_NOW, nullptr, 0);
  base::write_whole(file, memory.bytes);
}

void append_fixed(std::string& line, double value, int decimals, char decimal) {
  char buffer[400];
  const auto [end, fault] = std::to_chars(buffer, buffer + sizeof buffer, value, std::chars_format::fixed, decimals);
  if (fault != std::errc{}) return;
  std::string_view text(buffer, static_cast<std::size_t>(end - buffer));
  if (text.starts_with('-') && text.find_first_of("123456789") == std::string_view::npos) text.remove_prefix(1);
  const std::size_t from = line.size();
  line += text;
  std::replace(line.begin() + static_cast<std::ptrdiff_t>(from), line.end(), '.', decimal);
}

}  // namespace

void write_wav(const std::filesystem::path& file, const Samples& samples, int bits) {
  if (bits != 16 && bits != 24) refuse(file, "integer WAV files are written with 16 or 24 bits");
  const double full_scale = std::ldexp(1.0, bits - 1);
  const auto convert = [&](double value) {
    if (std::isnan(value)) refuse(file, "an integer sample cannot hold a missing value");
    const double counts = std::clamp(std::nearbyint(value * full_scale), -full_scale, full_scale - 1.0);
    // libsndfile takes the upper bits of an int.
    return static_cast<int>(static_cast<std::int64_t>(counts) * (std::int64_t{1} << (32 - bits)));
  };
  write_sound<int>(file, samples, bits == 16 ? SF_FORMAT_PCM_16 : SF_FORMAT_PCM_24, convert, sf_writef_int);
}

void write_wav_float(const std::filesystem::path& file, const Samples& samples) {
  write_sound<float>(
      file, samples, SF_FORMAT_FLOAT, [](double value) { return static_cast<float>(value); }, sf_writef_float);
}

void write_csv(const std::filesystem::path& file, const Samples& samples, const CsvStyle& style) {
  const std::size_t frames = frames_of(file, samples);
  if (!samples.names.empty() && samples.names.size() != samples.channels.size()) {
    refuse(file, "there are as many names as channels");
  }
  if (!style.time_name.empty() && !(samples.rate_hz > 0.0)) refuse(file, "a time column needs a sampling rate");
  const char* line_end = style.crlf ? "\r\n" : "\n";
  std::string text;
  for (const std::string& line : style.header_lines) text += line + line_end;
  if (!samples.names.empty()) {
    if (!style.time_name.empty()) text += style.time_name + style.separator;
    for (std::size_t c = 0; c < samples.names.size(); ++c) {
      if (c > 0) text += style.separator;
      text += samples.names[c];
    }
    text += line_end;
  }
  for (std::size_t i = 0; i < frames; ++i) {
    if (!style.time_name.empty()) {
      append_fixed(text, static_cast<double>(i) / samples.rate_hz, style.time_decimals, style.decimal);
      text += style.separator;
    }
    for (std::size_t c = 0; c < samples.channels.size(); ++c) {
      if (c > 0) text += style.separator;
      const double value = samples.channels[c][i];
      if (std::isfinite(value)) append_fixed(text, value, style.decimals, style.decimal);
    }
    text += line_end;
  }
  base::write_whole(file, text);
}

}  // namespace stillmass::recording
