#pragma once

#include <cstddef>
#include <string_view>

namespace stillmass::recording {

/// What a block of lines consists of, counted without telling its lines apart.
struct Census {
  std::size_t lines = 0;
  std::size_t separators = 0;
  std::size_t ended_by_separator = 0;  ///< lines
  std::size_t odd = 0;                 ///< bytes of anything but numbers, empty cells, blank lines
};

/// `stamps`: letters of dates are known as well. The block is not empty.
Census census_of(std::string_view block, char separator, bool stamps);

}  // namespace stillmass::recording
