#pragma once

#include <cstdint>
#include <memory>
#include <optional>
#include <string>

#include "recording/input_file.hpp"
#include "recording/riff_header.hpp"

namespace stillmass::recording {

/// One decoder over a shared file, with a position of its own. Samples are interleaved, full scale 1.0.
class SoundReader {
 public:
  /// With a header, the samples are taken from where that says, whatever sizes the file declares. Throws `Error`
  /// (file).
  explicit SoundReader(std::shared_ptr<const InputFile> file, const RiffHeader* samples_at = nullptr);
  ~SoundReader();

  int channels() const;
  int rate_hz() const;
  /// As the file says; nothing for a compressed file that does not say it.
  std::optional<std::int64_t> frames() const;
  bool is_compressed() const;
  std::string format() const;  ///< "WAV, 24-bit"
  int integer_bits() const;    ///< 0: floating point
  /// The type of samples that are read without rounding.
  enum class Stored { integer, single_precision, double_precision };
  Stored stored() const;
  /// False where the file cannot be read there. In a compressed file whose end is lost, it decodes all that stands
  /// before.
  bool seek(std::int64_t frame);
  /// Frames read; fewer than asked for at the end.
  std::int64_t read(double* to, std::int64_t frames);
  std::int64_t read(float* to, std::int64_t frames);         ///< the same of a file of that type
  std::int64_t read(std::int32_t* to, std::int64_t frames);  ///< full scale 2^31

 private:
  void open();
  bool decode_up_to(std::int64_t frame);

  struct Handle;
  std::unique_ptr<Handle> handle_;
};

}  // namespace stillmass::recording
