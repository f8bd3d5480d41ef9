#pragma once

#include <cstddef>
#include <memory>
#include <optional>
#include <vector>

#include "stillmass/base/interval.hpp"
#include "stillmass/recording/pass.hpp"

namespace stillmass::recording {

/// A recording reduced to the columns of a picture: no extreme value is lost.
struct OverviewPicture {
  std::vector<double> time_s;  ///< of the first frame of each column, from the start of the recording
  /// [channel][column]: least and largest sample, SI; nothing where no sample of the column is valid.
  std::vector<std::vector<std::optional<base::Interval>>> channels;
};

/// Gathers the picture in a pass shared with others. Column k of n holds the frames with
/// floor((frame - begin) n / size) = k, so the picture does not depend on how the pass is cut.
class Overview : public Consumer {
 public:
  /// `columns` (at least 1) is cut to the number of frames in the range.
  Overview(const Recording& recording, FrameRange range, std::size_t columns);

  std::unique_ptr<Consumer> fresh(FrameRange owned) const override;
  void take(const Chunk& chunk) override;
  void merge(Consumer& next) override;
  OverviewPicture result() const;

 private:
  Overview(const Overview& whole, FrameRange owned);
  std::size_t column_of(std::int64_t frame) const;
  std::int64_t first_frame_of(std::size_t column) const;

  const Recording* recording_;
  FrameRange range_;  ///< of the picture
  FrameRange owned_;  ///< of this partial
  std::size_t columns_;
  std::size_t first_column_ = 0;                   ///< of this partial
  std::vector<std::vector<base::Interval>> held_;  ///< [channel][column - first_column_]; empty: lo > hi
};

}  // namespace stillmass::recording
