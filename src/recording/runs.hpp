#pragma once

#include <cstdint>
#include <limits>
#include <optional>
#include <span>
#include <vector>

namespace stillmass::recording {

/// Equal samples in a row, and the samples beside them (NaN: none, the signal begins or ends there).
struct Run {
  std::int64_t begin = 0;
  std::int64_t end = 0;
  std::size_t segment = 0;
  double value = 0.0;
  double before = std::numeric_limits<double>::quiet_NaN();
  double after = std::numeric_limits<double>::quiet_NaN();

  std::int64_t length() const { return end - begin; }
};

/// The earliest runs of some kind, as many as are kept, how many there were and where the last one ends.
struct RunList {
  static constexpr std::size_t kept = 256;
  std::vector<Run> first;
  std::int64_t runs = 0;
  std::int64_t samples = 0;
  std::int64_t longest = 0;
  std::int64_t end = 0;

  void add(const Run& run);
  void append(const RunList& later);
};

/// The runs at the highest value that holds a run at all (of the mirrored signal: at the lowest).
struct FlatTops {
  double sign = 1.0;
  double value = -std::numeric_limits<double>::infinity();  ///< sign times the sample
  RunList list;

  void add(const Run& run);
  void append(const FlatTops& later);
};

/// Finds runs in a stream of samples that comes in pieces. Chains over consecutive pieces, joined in order, hold the
/// same runs as one chain over all of them.
class RunChain {
 public:
  /// zero: the value of a sample of which nothing is stored. flat_run: length of a long run.
  RunChain(double zero, std::int64_t flat_run);

  /// Consecutive samples of one segment, the first at that frame; not empty.
  void take(std::span<const double> samples, std::int64_t first_frame, std::size_t segment);
  void append(const RunChain& later);
  /// The runs at both ends of the stream are counted as they are.
  void close();

  const FlatTops& tops() const { return tops_; }
  const FlatTops& bottoms() const { return bottoms_; }
  const RunList& zeros() const { return zeros_; }
  const RunList& flats() const { return flats_; }

 private:
  void push(Run run);
  void close_last();
  void sort_in(const Run& run);
  void append_sorted(const RunChain& later);

  double zero_;
  std::int64_t flat_run_;
  std::optional<Run> first_;  // complete to the right, may go on to the left
  std::optional<Run> last_;   // may go on to the right
  bool last_is_first_ = false;
  FlatTops tops_;
  FlatTops bottoms_;
  RunList zeros_;
  RunList flats_;
};

}  // namespace stillmass::recording
