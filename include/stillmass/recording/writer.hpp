#pragma once

#include <filesystem>
#include <string>
#include <vector>

namespace stillmass::recording {

/// Samples to be written, planar.
struct Samples {
  double rate_hz = 0.0;
  std::vector<std::string> names;
  std::vector<std::vector<double>> channels;  ///< all of one length
};

/// WAV with integer samples of `bits` (16, 24); values are fractions of full scale, rounded to nearest, clipped at the
/// ends. The file must not exist. Throws `Error` (kind file).
void write_wav(const std::filesystem::path& file, const Samples& samples, int bits);
/// WAV with float32 samples, values as they are.
void write_wav_float(const std::filesystem::path& file, const Samples& samples);

/// How a logger writes its text files.
struct CsvStyle {
  char separator = ',';
  char decimal = '.';
  std::vector<std::string> header_lines;  ///< written above the row of names
  std::string time_name = "time [s]";     ///< empty: no time column
  int time_decimals = 6;
  int decimals = 5;
  bool crlf = false;
};
void write_csv(const std::filesystem::path& file, const Samples& samples, const CsvStyle& style);

}  // namespace stillmass::recording
