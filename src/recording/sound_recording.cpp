#include "recording/sound_recording.hpp"

#include <algorithm>
#include <array>
#include <cmath>
#include <cstdint>
#include <limits>

#include <fmt/format.h>

#include "stillmass/base/error.hpp"
#include "stillmass/base/number.hpp"
#include "stillmass/recording/scale.hpp"

#include "recording/form_header.hpp"
#include "recording/interleaved.hpp"
#include "recording/riff_header.hpp"
#include "recording/sound_reader.hpp"
#include "recording/validity.hpp"

namespace stillmass::recording {
namespace {

// What all handles of one recording share.
struct Source {
  std::shared_ptr<const InputFile> file;
  std::optional<RiffHeader> repair;  // samples are where this says, not where the file says

  SoundReader open() const { return SoundReader(file, repair ? &*repair : nullptr); }
};

class SoundRecording : public Reader {
 public:
  SoundRecording(std::shared_ptr<const Source> source, std::shared_ptr<const Recording> recording)
      : source_(std::move(source)), sound_(source_->open()), frames_(sound_), validity_(recording->channels.size()) {
    recording_ = std::move(recording);
  }

  void seek(std::int64_t frame) override {
    if (frame == at_) return;
    if (frame < recording_->frames && !sound_.seek(frame)) broken_at(frame);
    at_ = frame;
  }

  bool next(Chunk& chunk, std::size_t max_frames) override {
    const std::int64_t wanted = std::min(recording_->frames - at_, static_cast<std::int64_t>(max_frames));
    if (wanted <= 0) return false;
    const std::size_t channels = recording_->channels.size();
    chunk.segment = 0;
    chunk.first_frame = at_;
    chunk.resize(channels, static_cast<std::size_t>(wanted));
    for (std::size_t done = 0; done < chunk.frames;) {
      const std::size_t count = std::min(Interleaved::most_frames, chunk.frames - done);
      const std::int64_t read = frames_.read(sound_, static_cast<std::int64_t>(count));
      if (read != static_cast<std::int64_t>(count)) {
        broken_at(at_ + static_cast<std::int64_t>(done) + std::max<std::int64_t>(0, read));
      }
      spread(chunk, done, count);
      done += count;
    }
    validity_.finish(chunk);
    at_ += wanted;
    return true;
  }

  std::unique_ptr<Reader> second() const override { return std::make_unique<SoundRecording>(source_, recording_); }

 private:
  // The frames just read, to the chunk's frames from `first` on.
  void spread(Chunk& chunk, std::size_t first, std::size_t count) {
    targets_.clear();
    for (std::size_t c = 0; c < recording_->channels.size(); ++c) {
      const Channel& channel = recording_->channels[c];
      targets_.push_back({channel.factor, channel.offset, chunk.channel(c).data() + first});
    }
    const bool all_finite = frames_.to(targets_, count);
    for (std::size_t c = 0; c < targets_.size(); ++c) {
      if (all_finite && stays_finite(recording_->channels[c])) continue;
      for (std::size_t i = 0; i < count; ++i) {
        if (!std::isfinite(targets_[c].out[i])) {
          validity_.mark_bad(c, chunk.first_frame + static_cast<std::int64_t>(first + i));
        }
      }
    }
  }

  // No finite sample leaves the range of numbers by the channel's scale; a double may.
  bool stays_finite(const Channel& channel) const {
    constexpr double largest = std::numeric_limits<float>::max();
    return sound_.stored() != SoundReader::Stored::double_precision &&
           std::isfinite(largest * std::abs(channel.factor) + std::abs(channel.offset));
  }

  [[noreturn]] void broken_at(std::int64_t frame) const {
    throw base::file_error(source_->file->name(),
                           fmt::format("cannot be read from {} s on", base::plain(recording_->time_s(frame))),
                           "copy it again, or use --to to stop before that");
  }

  std::shared_ptr<const Source> source_;
  SoundReader sound_;
  std::int64_t at_ = 0;
  Interleaved frames_;
  std::vector<Interleaved::Target> targets_;
  Validity validity_;
};

// The frames that can be decoded one after the other.
std::int64_t decoded_frames(SoundReader& sound) {
  constexpr std::int64_t at_once = 4096;
  std::vector<double> frames(static_cast<std::size_t>(at_once * sound.channels()));
  if (!sound.seek(0)) return 0;
  std::int64_t count = 0;
  for (std::int64_t got = sound.read(frames.data(), at_once); got > 0; got = sound.read(frames.data(), at_once)) {
    count += got;
  }
  return count;
}

// Up to which frame the file can be read: a compressed file says how long it was, even if its end is lost, or it does
// not say it.
std::int64_t readable_frames(SoundReader& sound) {
  std::vector<double> frame(static_cast<std::size_t>(sound.channels()));
  const auto readable = [&](std::int64_t at) { return sound.seek(at) && sound.read(frame.data(), 1) == 1; };
  if (!sound.frames()) return decoded_frames(sound);
  std::int64_t good = 0;
  std::int64_t bad = *sound.frames();
  if (bad == 0 || readable(bad - 1)) return bad;
  if (sound.is_compressed()) return decoded_frames(sound);
  while (good < bad) {
    const std::int64_t middle = good + (bad - good) / 2;
    if (readable(middle)) {
      good = middle + 1;
    } else {
      bad = middle;
    }
  }
  return good;
}

// Frames that the header promises: at least those that the library sees, of a RIFF by its data chunk, of an AIFF by
// its chunks.
std::int64_t promised_frames(const InputFile& file, const std::optional<RiffHeader>& riff, const SoundReader& sound) {
  const std::int64_t seen = sound.frames().value_or(0);
  if (riff) return std::max(seen, riff->declared_frames().value_or(seen));
  return std::max(seen, promised_form_frames(file).value_or(seen));
}

// What no library would read, in words of its own.
void check_header(const RiffHeader& riff, const std::string& where) {
  constexpr int most_channels = 1024;  // libsndfile's limit
  constexpr std::int64_t highest_rate_hz = std::numeric_limits<std::int32_t>::max();
  if (riff.channels < 1 || riff.channels > most_channels) {
    throw base::file_error(where, fmt::format("its header states {} channels", riff.channels),
                           "copy it again from the recorder; at most 1024 channels are taken");
  }
  if (riff.rate_hz < 1 || riff.rate_hz > highest_rate_hz) {
    throw base::file_error(where, fmt::format("its header states a sampling rate of {} Hz", riff.rate_hz),
                           "copy it again from the recorder");
  }
}

// True where the library sees other samples than the header walk of our own, or none at all.
bool needs_repair(const Source& source, const RiffHeader& riff) {
  const int bytes = riff.sample_bytes();
  const bool integer = riff.format_tag == 1 && bytes >= 1 && bytes <= 4;
  const bool floating = riff.format_tag == 3 && (bytes == 4 || bytes == 8);
  if ((!integer && !floating) || riff.frames() == 0) return false;
  try {
    return source.open().frames() != riff.frames();
  } catch (const base::Error&) {
    return true;
  }
}

void note_missing_end(Recording& recording, std::int64_t promised) {
  if (promised <= recording.frames) return;
  const double from = static_cast<double>(recording.frames) / recording.rate_hz;
  const double to = static_cast<double>(promised) / recording.rate_hz;
  base::Finding finding{base::Code::truncated, fmt::format("the file ends after {} s, its header promises {} s",
                                                           base::plain(from), base::plain(to))};
  finding.from_s = from;
  finding.to_s = to;
  recording.findings.push_back(std::move(finding));
}

// The recorder never came to fill in the sizes: all that is there is read, but nobody knows whether more was recorded.
void note_open_end(Recording& recording, const std::optional<RiffHeader>& riff) {
  if (!riff || riff->declared_bytes) return;
  const double end = recording.duration_s();
  base::Finding finding{
      base::Code::truncated,
      fmt::format("the header was never completed; the file is read to its end at {} s", base::plain(end))};
  finding.from_s = end;
  finding.strength = base::Strength::weak;
  recording.findings.push_back(std::move(finding));
}

std::vector<Channel> plain_channels(const SoundReader& sound) {
  std::vector<Channel> channels(static_cast<std::size_t>(sound.channels()));
  for (std::size_t c = 0; c < channels.size(); ++c) {
    channels[c].index = static_cast<int>(c) + 1;
    channels[c].name = fmt::format("channel {}", c + 1);
    if (sound.integer_bits() > 0) {
      channels[c].stored_step = std::ldexp(1.0, 1 - sound.integer_bits());
      channels[c].full_scale = 1.0;
    }
  }
  return channels;
}

}  // namespace

bool is_sound(std::string_view first_bytes) {
  constexpr auto starts = std::to_array<std::string_view>({"RIFF", "RIFX", "RF64", "BW64", "riff", "FORM", "fLaC"});
  return std::any_of(starts.begin(), starts.end(),
                     [&](std::string_view start) { return first_bytes.starts_with(start); });
}

std::unique_ptr<Reader> open_sound(std::shared_ptr<const InputFile> file, const std::filesystem::path& path,
                                   const OpenOptions& options) {
  auto source = std::make_shared<Source>();
  source->file = std::move(file);
  const std::optional<RiffHeader> riff = read_riff_header(*source->file);
  if (riff) check_header(*riff, source->file->name());
  if (riff && needs_repair(*source, *riff)) source->repair = riff;
  SoundReader sound = source->open();

  auto recording = std::make_shared<Recording>();
  recording->file = path;
  recording->format = sound.format();
  recording->rate_hz = sound.rate_hz();
  recording->frames = readable_frames(sound);
  if (recording->frames == 0) {
    throw base::file_error(source->file->name(), "holds no samples, only a header", "record it again");
  }
  if (options.rate_hz && std::abs(*options.rate_hz - recording->rate_hz) > 1e-6 * recording->rate_hz) {
    throw base::usage_error(source->file->name(),
                            fmt::format("its header says {} Hz, not {} Hz", base::shortest(recording->rate_hz),
                                        base::shortest(*options.rate_hz)),
                            "leave --rate out, it is for text files without a time column");
  }
  recording->segments = {{0, recording->frames, 0.0}};
  note_missing_end(*recording, promised_frames(*source->file, riff, sound));
  note_open_end(*recording, riff);
  recording->channels = plain_channels(sound);
  apply_settings(recording->channels, options.channels, path, recording->findings);
  return std::make_unique<SoundRecording>(std::move(source), std::move(recording));
}

}  // namespace stillmass::recording
