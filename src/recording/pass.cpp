#include "stillmass/recording/pass.hpp"

#include <algorithm>
#include <vector>

#include "stillmass/base/parallel.hpp"

namespace stillmass::recording {
namespace {

constexpr std::int64_t chunk_frames = 8192;

using Partials = std::vector<std::unique_ptr<Consumer>>;

// Gives each partial the frames it owns and those of its lookahead. A chunk never crosses the end of what one of the
// partials wants, so each gets exactly that.
void feed(Reader& reader, FrameRange owned, std::int64_t pass_end, Partials& partials, const base::Context& context) {
  std::vector<std::int64_t> ends;
  for (const auto& partial : partials) ends.push_back(std::min(owned.end + partial->lookahead(), pass_end));
  const std::int64_t last = *std::max_element(ends.begin(), ends.end());

  Chunk chunk;
  reader.seek(owned.begin);
  for (std::int64_t at = owned.begin; at < last; at = chunk.range().end) {
    context.check_stop();
    std::int64_t stop = at < owned.end ? owned.end : last;
    for (const std::int64_t end : ends) {
      if (end > at) stop = std::min(stop, end);
    }
    if (!reader.next(chunk, static_cast<std::size_t>(std::min(stop - at, chunk_frames)))) return;
    for (std::size_t i = 0; i < partials.size(); ++i) {
      if (at < ends[i]) partials[i]->take(chunk);
    }
  }
}

// What a range looks at past its end is read again by the next one: far looks ask for longer ranges.
std::int64_t range_frames(std::span<Consumer* const> consumers) {
  std::int64_t lookahead = 0;
  for (const Consumer* consumer : consumers) lookahead = std::max(lookahead, consumer->lookahead());
  const std::int64_t wanted = 2 * lookahead;
  return std::max<std::int64_t>(1, (wanted + pass_range_frames - 1) / pass_range_frames) * pass_range_frames;
}

}  // namespace

void run_pass(const Reader& reader, FrameRange range, std::span<Consumer* const> consumers,
              const base::Context& context, std::string_view what) {
  const FrameRange pass{std::max<std::int64_t>(range.begin, 0), std::min(range.end, reader.recording().frames)};
  if (consumers.empty() || pass.size() == 0) return;

  const std::int64_t frames = range_frames(consumers);
  std::int64_t done = 0;
  base::for_ranges(
      context, static_cast<std::size_t>(pass.size()), static_cast<std::size_t>(frames),
      [&](std::size_t begin, std::size_t end) {
        const FrameRange owned{pass.begin + static_cast<std::int64_t>(begin),
                               pass.begin + static_cast<std::int64_t>(end)};
        Partials partials;
        for (const Consumer* consumer : consumers) partials.push_back(consumer->fresh(owned));
        feed(*reader.second(), owned, pass.end, partials, context);
        return partials;
      },
      [&](Partials partials) {
        for (std::size_t i = 0; i < consumers.size(); ++i) consumers[i]->merge(*partials[i]);
        done = std::min(done + frames, pass.size());
        context.report(what, static_cast<double>(done) / static_cast<double>(pass.size()));
      });
}

}  // namespace stillmass::recording
