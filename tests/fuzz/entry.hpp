#pragma once

#include <cstddef>
#include <cstdint>
#include <span>
#include <stdexcept>
#include <string>

namespace stillmass::tests {

using Bytes = std::span<const std::uint8_t>;

/// A promise to the user that hostile bytes have broken: an error of more than one line, text that is not safe to
/// print.
class BrokenPromise : public std::logic_error {
 public:
  using std::logic_error::logic_error;
};

/// What the program does with a recording of these bytes: opens it by content, checks it, shows the result as text and
/// as JSON; then reads a piece from its middle. A text without a time column is tried again with a rate.
/// `Error` (but not of kind internal) and `Stopped` are answers; everything else is thrown on: a find.
/// Returns the error's text; empty where the bytes were taken.
std::string check_recording(Bytes bytes);

/// Whether the program takes a recording of these bytes for sound: the fuzzers of text and of sound keep to their
/// kinds.
bool is_sound(Bytes bytes);

/// What the program does with a survey file of these bytes. Beside it stand recordings named "a.wav" and "b.csv"
/// (empty: a survey file is read without opening them). Returns and throws as above.
std::string read_survey_file(Bytes bytes);

}  // namespace stillmass::tests
