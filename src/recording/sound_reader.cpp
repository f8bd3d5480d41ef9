#include "recording/sound_reader.hpp"

#include <algorithm>
#include <array>
#include <cstdio>
#include <utility>
#include <vector>

#include <fmt/format.h>
#include <sndfile.h>

#include "stillmass/base/error.hpp"
#include "stillmass/base/text.hpp"

namespace stillmass::recording {
namespace {

constexpr std::size_t read_ahead_bytes = 256 * 1024;

// The bytes [begin, begin + length) of a file as libsndfile reads them, a few thousand at a time; we fetch more at
// once.
struct Window {
  std::shared_ptr<const InputFile> file;
  sf_count_t begin = 0;
  sf_count_t length = 0;
  sf_count_t at = 0;
  std::vector<char> ahead;
  sf_count_t ahead_at = 0;  // of the first byte held
  std::size_t ahead_held = 0;

  // Copies what is held from `at` on, up to `count` bytes; fetches if nothing is. 0 at the end.
  std::size_t take(char* to, std::size_t count) {
    if (at < ahead_at || at >= ahead_at + static_cast<sf_count_t>(ahead_held)) {
      ahead.resize(read_ahead_bytes);
      const auto left = static_cast<std::size_t>(length - at);
      ahead_at = at;
      ahead_held = file->read_at(begin + at, ahead.data(), std::min(left, ahead.size()));
    }
    const auto skipped = static_cast<std::size_t>(at - ahead_at);
    const std::size_t taken = std::min(count, ahead_held - skipped);
    std::copy_n(ahead.data() + skipped, taken, to);
    at += static_cast<sf_count_t>(taken);
    return taken;
  }
};

sf_count_t window_length(void* user) { return static_cast<Window*>(user)->length; }

sf_count_t window_seek(sf_count_t offset, int whence, void* user) {
  auto& window = *static_cast<Window*>(user);
  const sf_count_t from = whence == SEEK_SET ? 0 : (whence == SEEK_CUR ? window.at : window.length);
  window.at = std::clamp<sf_count_t>(from + offset, 0, window.length);
  return window.at;
}

sf_count_t window_read(void* to, sf_count_t count, void* user) {
  auto& window = *static_cast<Window*>(user);
  const auto wanted = static_cast<std::size_t>(count);
  std::size_t done = 0;
  try {
    while (done < wanted) {
      const std::size_t taken = window.take(static_cast<char*>(to) + done, wanted - done);
      if (taken == 0) break;
      done += taken;
    }
  } catch (const base::Error&) {  // must not pass through C; the short read is reported by the reader
    return static_cast<sf_count_t>(done);
  }
  return static_cast<sf_count_t>(done);
}

sf_count_t window_write(const void* /*from*/, sf_count_t /*count*/, void* /*user*/) { return 0; }
sf_count_t window_tell(void* user) { return static_cast<Window*>(user)->at; }

struct Coding {
  int subtype;
  int integer_bits;
  const char* text;
};
constexpr auto codings = std::to_array<Coding>({
    {SF_FORMAT_PCM_S8, 8, "8-bit"},
    {SF_FORMAT_PCM_U8, 8, "8-bit"},
    {SF_FORMAT_PCM_16, 16, "16-bit"},
    {SF_FORMAT_PCM_24, 24, "24-bit"},
    {SF_FORMAT_PCM_32, 32, "32-bit"},
    {SF_FORMAT_FLOAT, 0, "32-bit float"},
    {SF_FORMAT_DOUBLE, 0, "64-bit float"},
});

const char* container_text(int format) {
  switch (format & SF_FORMAT_TYPEMASK) {
    case SF_FORMAT_WAV:
    case SF_FORMAT_WAVEX:
    case SF_FORMAT_RAW:  // of samples found by a header walk of our own
      return "WAV";
    case SF_FORMAT_RF64:
      return "RF64";
    case SF_FORMAT_W64:
      return "W64";
    case SF_FORMAT_AIFF:
      return "AIFF";
    case SF_FORMAT_FLAC:
      return "FLAC";
    default:
      return nullptr;
  }
}

const Coding* coding_of(int format) {
  const auto found = std::find_if(codings.begin(), codings.end(),
                                  [&](const Coding& coding) { return coding.subtype == (format & SF_FORMAT_SUBMASK); });
  return found == codings.end() ? nullptr : &*found;
}

int raw_subtype(const RiffHeader& header) {
  constexpr int float_tag = 3;
  if (header.format_tag == float_tag) return header.sample_bytes() == 8 ? SF_FORMAT_DOUBLE : SF_FORMAT_FLOAT;
  switch (header.sample_bytes()) {
    case 1:
      return SF_FORMAT_PCM_U8;
    case 2:
      return SF_FORMAT_PCM_16;
    case 3:
      return SF_FORMAT_PCM_24;
    default:
      return SF_FORMAT_PCM_32;
  }
}

}  // namespace

struct SoundReader::Handle {
  Window window;
  SF_INFO wanted{};  // what is told to the library: nothing, or where the samples are
  SF_INFO info{};
  SNDFILE* sound = nullptr;

  ~Handle() {
    if (sound != nullptr) sf_close(sound);
  }
};

SoundReader::SoundReader(std::shared_ptr<const InputFile> file, const RiffHeader* samples_at)
    : handle_(std::make_unique<Handle>()) {
  Handle& h = *handle_;
  h.window.length = file->size();
  if (samples_at != nullptr) {
    h.window.begin = samples_at->data_offset;
    h.window.length = samples_at->real_bytes;
    h.info.samplerate = static_cast<int>(samples_at->rate_hz);
    h.info.channels = samples_at->channels;
    h.info.format =
        SF_FORMAT_RAW | raw_subtype(*samples_at) | (samples_at->big_endian ? SF_ENDIAN_BIG : SF_ENDIAN_LITTLE);
  }
  h.window.file = std::move(file);
  h.wanted = h.info;
  open();
}

void SoundReader::open() {
  Handle& h = *handle_;
  const std::string name = h.window.file->name();
  if (h.sound != nullptr) sf_close(h.sound);
  h.window.at = 0;
  h.info = h.wanted;
  SF_VIRTUAL_IO io{window_length, window_seek, window_read, window_write, window_tell};
  h.sound = sf_open_virtual(&io, SFM_READ, &h.info, &h.window);
  if (h.sound == nullptr) {
    throw base::file_error(name, "the sound file cannot be understood: " + base::printable(sf_strerror(nullptr)),
                           "copy it again from the recorder");
  }
  const char* container = container_text(h.info.format);
  if (container == nullptr || coding_of(h.info.format) == nullptr) {
    sf_close(std::exchange(h.sound, nullptr));
    throw base::file_error(name, "holds sound in a coding that is not taken",
                           "save it as WAV with integer or floating-point samples, not compressed");
  }
}

SoundReader::~SoundReader() = default;

int SoundReader::channels() const { return handle_->info.channels; }
int SoundReader::rate_hz() const { return handle_->info.samplerate; }
std::optional<std::int64_t> SoundReader::frames() const {
  constexpr sf_count_t not_stated = sf_count_t{1} << 62;
  return handle_->info.frames < not_stated ? std::optional<std::int64_t>(handle_->info.frames) : std::nullopt;
}
bool SoundReader::is_compressed() const { return (handle_->info.format & SF_FORMAT_TYPEMASK) == SF_FORMAT_FLAC; }
int SoundReader::integer_bits() const { return coding_of(handle_->info.format)->integer_bits; }

std::string SoundReader::format() const {
  return fmt::format("{}, {}", container_text(handle_->info.format), coding_of(handle_->info.format)->text);
}

bool SoundReader::seek(std::int64_t frame) {
  if (sf_seek(handle_->sound, frame, SEEK_SET) == frame) return true;
  return is_compressed() && decode_up_to(frame);
}

bool SoundReader::decode_up_to(std::int64_t frame) {
  constexpr std::int64_t frames_at_once = 4096;
  open();
  std::vector<double> passed(static_cast<std::size_t>(frames_at_once * channels()));
  while (frame > 0) {
    const std::int64_t got = read(passed.data(), std::min(frame, frames_at_once));
    if (got <= 0) return false;
    frame -= got;
  }
  return true;
}

SoundReader::Stored SoundReader::stored() const {
  if (integer_bits() > 0) return Stored::integer;
  const bool is_double = (handle_->info.format & SF_FORMAT_SUBMASK) == SF_FORMAT_DOUBLE;
  return is_double ? Stored::double_precision : Stored::single_precision;
}

std::int64_t SoundReader::read(double* to, std::int64_t frames) { return sf_readf_double(handle_->sound, to, frames); }
std::int64_t SoundReader::read(float* to, std::int64_t frames) { return sf_readf_float(handle_->sound, to, frames); }
std::int64_t SoundReader::read(std::int32_t* to, std::int64_t frames) {
  return sf_readf_int(handle_->sound, to, frames);
}

}  // namespace stillmass::recording
