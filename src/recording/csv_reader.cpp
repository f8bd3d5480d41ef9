#include "recording/csv_reader.hpp"

#include <algorithm>
#include <cmath>

#include <fmt/format.h>

#include "stillmass/base/error.hpp"
#include "stillmass/base/number.hpp"
#include "stillmass/recording/scale.hpp"

#include "recording/csv_findings.hpp"
#include "recording/csv_rows.hpp"
#include "recording/even_rows.hpp"
#include "recording/validity.hpp"

namespace stillmass::recording {
namespace {

// What both readers of text have in common: the place in the segments.
class SegmentedReader : public Reader {
 public:
  explicit SegmentedReader(std::shared_ptr<const Recording> recording) : validity_(recording->channels.size()) {
    recording_ = std::move(recording);
  }

  void seek(std::int64_t frame) override { at_ = frame; }

  bool next(Chunk& chunk, std::size_t max_frames) final {
    if (at_ >= recording_->frames || max_frames == 0) return false;
    const auto& segments = recording_->segments;
    const auto after = std::upper_bound(segments.begin(), segments.end(), at_,
                                        [](std::int64_t frame, const Segment& s) { return frame < s.first_frame; });
    const Segment& segment = *std::prev(after);
    const std::int64_t left = segment.first_frame + segment.frames - at_;
    chunk.segment = static_cast<std::size_t>(std::prev(after) - segments.begin());
    chunk.first_frame = at_;
    chunk.resize(recording_->channels.size(), std::min(max_frames, static_cast<std::size_t>(left)));
    fill(chunk);
    for (std::size_t c = 0; c < recording_->channels.size(); ++c) {
      const Channel& channel = recording_->channels[c];
      for (double& sample : chunk.channel(c)) sample = sample * channel.factor + channel.offset;
    }
    validity_.finish(chunk);
    at_ = chunk.range().end;
    return true;
  }

 protected:
  /// Puts stored samples into the chunk's frames.
  virtual void fill(Chunk& chunk) = 0;

  std::int64_t at_ = 0;
  Validity validity_;
};

// Even times: a row is a frame.
class RowReader : public SegmentedReader {
 public:
  RowReader(std::shared_ptr<const CsvSource> source, std::shared_ptr<const Recording> recording)
      : SegmentedReader(std::move(recording)), source_(std::move(source)), rows_(source_) {}

  std::unique_ptr<Reader> second() const override { return std::make_unique<RowReader>(source_, recording_); }

 protected:
  void fill(Chunk& chunk) override {
    rows_.seek(chunk.first_frame);
    double* const first = chunk.channel(0).data();
    const std::size_t stride = chunk.channels() > 1 ? static_cast<std::size_t>(chunk.channel(1).data() - first) : 1;
    bad_.clear();
    rows_.read(chunk.frames, first, stride, nullptr, bad_);
    for (const CsvRows::Bad& cell : bad_) {
      validity_.mark_bad(cell.channel, chunk.first_frame + static_cast<std::int64_t>(cell.row));
    }
  }

 private:
  std::shared_ptr<const CsvSource> source_;
  CsvRows rows_;
  std::vector<CsvRows::Bad> bad_;
};

// Uneven times: frames are interpolated between rows.
class EvenReader : public SegmentedReader {
 public:
  EvenReader(std::shared_ptr<const CsvSource> source, std::shared_ptr<const Recording> recording)
      : SegmentedReader(std::move(recording)), source_(std::move(source)), rows_(source_) {
    values_.resize(recording_->channels.size());
  }

  void seek(std::int64_t frame) override {
    if (frame != at_) rows_.forget();
    at_ = frame;
  }

  std::unique_ptr<Reader> second() const override { return std::make_unique<EvenReader>(source_, recording_); }

 protected:
  void fill(Chunk& chunk) override {
    const TimedRows& part = source_->scan.grid.parts[chunk.segment];
    const std::int64_t first = chunk.first_frame - recording_->segments[chunk.segment].first_frame;
    rows_.enter(part);
    for (std::size_t i = 0; i < chunk.frames; ++i) {
      const auto frame = first + static_cast<std::int64_t>(i);
      rows_.at(part.first_s + static_cast<double>(frame) / recording_->rate_hz, values_, good_);
      for (std::size_t c = 0; c < values_.size(); ++c) {
        chunk.channel(c)[i] = values_[c];
        if (!good_[c]) validity_.mark_bad(c, chunk.first_frame + static_cast<std::int64_t>(i));
      }
    }
  }

 private:
  std::shared_ptr<const CsvSource> source_;
  EvenRows rows_;
  std::vector<double> values_;
  std::vector<bool> good_;
};

void set_segments(const CsvScan& scan, Recording& recording) {
  const GridVerdict& grid = scan.grid;
  for (const TimedRows& part : grid.parts) {
    std::int64_t frames = part.rows;
    if (!grid.even) {
      constexpr double rounding_frames = 1e-6;
      frames = static_cast<std::int64_t>((part.last_s - part.first_s) * grid.rate_hz + rounding_frames) + 1;
    }
    recording.segments.push_back({recording.frames, frames, part.start_s});
    recording.frames += frames;
  }
}

// Without times nobody knows how long a restart took: a new segment, which follows at once.
void set_restarts(const CsvScan& scan, Recording& recording) {
  std::int64_t begin = 0;
  const auto end_at = [&](std::int64_t end) {
    recording.segments.push_back({begin, end - begin, static_cast<double>(begin) / recording.rate_hz});
    begin = end;
  };
  for (const std::int64_t row : scan.restarts) end_at(row);
  end_at(scan.rows);
}

// Beyond these no recorder samples, and numbers of frames computed from the rate would leave their range.
void check_plausible(const Recording& recording, bool has_time, const std::string& where) {
  constexpr double slowest_hz = 1e-6;
  constexpr double fastest_hz = 1e9;
  if (recording.rate_hz >= slowest_hz && recording.rate_hz <= fastest_hz) return;
  const std::string rate = base::rounded(recording.rate_hz, 3) + " Hz";
  if (!has_time) throw base::usage_error(where, "no recorder samples at " + rate, "check --rate");
  throw base::file_error(where, "its times say " + rate, "check the column of times and its unit");
}

// The user's rate beside a column of times: they must agree.
void check_rate(const OpenOptions& options, const Recording& recording, const std::string& where) {
  constexpr double agreement = 0.05;
  if (!options.rate_hz || std::abs(*options.rate_hz / recording.rate_hz - 1.0) <= agreement) return;
  throw base::usage_error(where,
                          fmt::format("its times say {} Hz, not {} Hz", base::rounded(recording.rate_hz, 6),
                                      base::shortest(*options.rate_hz)),
                          "leave --rate out, or say with --time-unit what the times are, or --time-column 0 for none");
}

}  // namespace

std::unique_ptr<Reader> open_csv(std::shared_ptr<const InputFile> file, const std::filesystem::path& path,
                                 const OpenOptions& options, const base::Context& context) {
  const std::string where = file->name();
  TextSource text(std::move(file));
  CsvTable table = describe_table(recognise_dialect(text, options.text), text, options);
  CsvScan scan = scan_rows(text, table, options.rate_hz, context);

  auto recording = std::make_shared<Recording>();
  recording->file = path;
  recording->format = table.format;
  if (table.has_time) {
    recording->rate_hz = scan.grid.rate_hz;
    if (table.time_is_count) recording->rate_hz = *options.rate_hz;
    check_plausible(*recording, true, where);
    check_rate(options, *recording, where);
    set_segments(scan, *recording);
  } else {
    recording->rate_hz = *options.rate_hz;
    check_plausible(*recording, false, where);
    recording->frames = scan.rows;
    set_restarts(scan, *recording);
  }
  recording->channels = table.channels;
  apply_settings(recording->channels, options.channels, path, recording->findings);
  note_scan(scan, text, *recording);

  const bool even = scan.grid.even;
  auto source = std::make_shared<const CsvSource>(std::move(text), std::move(table), std::move(scan));
  if (even) return std::make_unique<RowReader>(std::move(source), std::move(recording));
  return std::make_unique<EvenReader>(std::move(source), std::move(recording));
}

}  // namespace stillmass::recording
