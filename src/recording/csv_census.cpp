#include "recording/csv_census.hpp"

#include <algorithm>

namespace stillmass::recording {

// Bytes are counted in strips short enough for counters of 8 bits, and without branches: so the compiler turns the loop
// into vector code.
Census census_of(std::string_view block, char separator, bool stamps) {
  constexpr std::size_t strip = 240;
  using Byte = unsigned char;
  const auto* const bytes = reinterpret_cast<const Byte*>(block.data());
  const auto cell_end = static_cast<Byte>(separator);
  const Byte first_letter = stamps ? 'T' : 'E';  // of dates: "2024-05-01T12:00Z"
  const Byte second_letter = stamps ? 'Z' : 'E';
  Census census;
  const bool starts_well = bytes[0] != cell_end && (bytes[0] == ' ' || (bytes[0] >= '+' && bytes[0] <= ';'));
  census.odd = starts_well ? 0 : 1;
  for (std::size_t begin = 1; begin < block.size(); begin += strip) {
    const std::size_t end = std::min(begin + strip, block.size());
    Byte lines = 0;
    Byte separators = 0;
    Byte ended = 0;
    Byte odd = 0;
    for (std::size_t i = begin; i < end; ++i) {
      const Byte c = bytes[i];
      const Byte previous = bytes[i - 1];
      const Byte is_line_end = c == '\n';
      const Byte is_cell_end = c == cell_end;
      const Byte closes_line = static_cast<Byte>(is_line_end + (c == '\r'));
      const Byte after_line = previous == '\n';
      const Byte after_cell = previous == cell_end;
      // Sums, not "or": the compiler would make a bit test of an "or" of comparisons, and no vector code.
      const Byte of_numbers = static_cast<Byte>(c - '+') <= ';' - '+';
      const Byte of_letters = static_cast<Byte>((c == 'e') + (c == 'E') + (c == first_letter) + (c == second_letter));
      const Byte of_blanks = static_cast<Byte>((c == ' ') + (c == '\t'));
      const Byte known = static_cast<Byte>(of_numbers + of_letters + of_blanks + closes_line);
      const Byte unknown = known == 0;
      const Byte empty_line = after_line & static_cast<Byte>(is_cell_end + closes_line);
      lines = static_cast<Byte>(lines + is_line_end);
      separators = static_cast<Byte>(separators + is_cell_end);
      ended = static_cast<Byte>(ended + (after_cell & closes_line));
      odd = static_cast<Byte>(odd | unknown | empty_line | (after_cell & is_cell_end));
    }
    census.lines += lines;
    census.separators += separators;
    census.ended_by_separator += ended;
    census.odd += odd;
  }
  return census;
}

}  // namespace stillmass::recording
