#include "modal/hammer_simulation.hpp"

#include <algorithm>
#include <cmath>

#include "stillmass/numeric/fir.hpp"
#include "stillmass/numeric/random.hpp"

namespace stillmass::tests {
namespace {

class MemoryReader : public recording::Reader {
 public:
  MemoryReader(std::shared_ptr<const recording::Recording> recording,
               std::shared_ptr<const std::vector<std::vector<double>>> channels)
      : channels_(std::move(channels)) {
    recording_ = std::move(recording);
  }

  void seek(std::int64_t frame) override { at_ = frame; }

  bool next(recording::Chunk& chunk, std::size_t max_frames) override {
    for (std::size_t i = 0; i < recording_->segments.size(); ++i) {
      const recording::Segment& segment = recording_->segments[i];
      const std::int64_t end = segment.first_frame + segment.frames;
      if (at_ < segment.first_frame || at_ >= end) continue;
      const auto count = std::min(static_cast<std::size_t>(end - at_), max_frames);
      chunk.segment = i;
      chunk.first_frame = at_;
      chunk.valid.clear();
      chunk.resize(channels_->size(), count);
      for (std::size_t c = 0; c < channels_->size(); ++c) {
        std::copy_n((*channels_)[c].begin() + at_, count, chunk.channel(c).begin());
      }
      at_ += static_cast<std::int64_t>(count);
      return true;
    }
    return false;
  }

  std::unique_ptr<recording::Reader> second() const override {
    return std::make_unique<MemoryReader>(recording_, channels_);
  }

 private:
  std::shared_ptr<const std::vector<std::vector<double>>> channels_;
  std::int64_t at_ = 0;
};

recording::Channel channel(int index, const char* unit, recording::Role role, double full_scale) {
  recording::Channel result;
  result.index = index;
  result.name = (role == recording::Role::force ? "hammer" : "a") + std::to_string(index);
  result.role = role;
  result.point = role == recording::Role::force ? "p2" : "p" + std::to_string(index);
  result.unit = *base::unit_named(unit);
  result.unit_known = true;
  result.full_scale = full_scale;
  result.stored_step = full_scale / 8388608.0;
  return result;
}

double stored(double x, double full_scale) {
  const double step = full_scale / 8388608.0;
  return std::clamp(std::round(x / step) * step, -full_scale, full_scale - step);
}

}  // namespace

std::unique_ptr<recording::Reader> memory_reader(recording::Recording recording,
                                                 std::vector<std::vector<double>> channels) {
  recording.frames = std::ssize(channels.front());
  if (recording.segments.empty()) recording.segments = {{0, recording.frames, 0.0}};
  return std::make_unique<MemoryReader>(std::make_shared<recording::Recording>(std::move(recording)),
                                        std::make_shared<std::vector<std::vector<double>>>(std::move(channels)));
}

std::unique_ptr<recording::Reader> HammerSimulation::reader() const {
  constexpr std::size_t oversampling = 4;
  const numeric::Random random(seed);
  const auto frames = static_cast<std::size_t>(duration_s * rate_hz);
  std::vector<std::vector<double>> channels(1 + shapes.size(), std::vector<double>(frames * oversampling, 0.0));
  for (const oracle::HalfSine& blow : blows) {
    // What is left of a blow after 16 s is below 1e-10 of the slowest mode here.
    const double step_s = 1.0 / (rate_hz * static_cast<double>(oversampling));
    const auto first = static_cast<std::size_t>(blow.start_s / step_s);
    const auto last = std::min(channels[0].size(), static_cast<std::size_t>((blow.start_s + 16.0) / step_s));
    for (std::size_t i = first; i < last; ++i) {
      const double t = static_cast<double>(i) * step_s;
      channels[0][i] += blow.force(t);
      for (std::size_t r = 0; r < modes.size(); ++r) {
        const double x = blow.acceleration(modes[r], t);
        for (std::size_t p = 0; p < shapes.size(); ++p) channels[p + 1][i] += shapes[p][r] * x;
      }
    }
  }
  for (std::size_t c = 0; c < channels.size(); ++c) {
    const double noise = c == 0 ? force_noise : response_noise;
    const double full_scale = c == 0 ? force_full_scale : response_full_scale;
    channels[c] = numeric::decimated(channels[c], oversampling);
    for (std::size_t i = 0; i < frames; ++i) {
      const double x = channels[c][i] + noise * random.normal(i, static_cast<std::uint32_t>(c));
      channels[c][i] = stored(c == 0 ? x : x + response_offset, full_scale);
    }
  }

  recording::Recording recording;
  recording.file = "simulated.wav";
  recording.rate_hz = rate_hz;
  recording.channels.push_back(channel(1, "N", recording::Role::force, force_full_scale));
  for (std::size_t p = 0; p < shapes.size(); ++p) {
    recording.channels.push_back(
        channel(static_cast<int>(p) + 2, "m/s2", recording::Role::vibration, response_full_scale));
  }
  return memory_reader(std::move(recording), std::move(channels));
}

std::vector<oracle::HalfSine> regular_blows(std::size_t count, double spacing_s, std::uint64_t seed) {
  const numeric::Random random(seed);
  std::vector<oracle::HalfSine> blows;
  for (std::size_t i = 0; i < count; ++i) {
    const double start = 1.0 + spacing_s * static_cast<double>(i) + 0.3 * random.uniform(i, 900);
    blows.push_back({start, 600.0 + 300.0 * random.uniform(i, 901), 0.004 + 0.002 * random.uniform(i, 902)});
  }
  return blows;
}

}  // namespace stillmass::tests
