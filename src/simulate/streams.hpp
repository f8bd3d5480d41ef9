#pragma once

#include <cstddef>
#include <cstdint>

namespace stillmass::simulate {

/// Who draws random numbers. Every use in every recording has a stream of its own (the `case` of numeric::Random), so
/// that a change of one leaves the others as they were.
enum class Draws : std::uint64_t { speed = 0, hammer = 1, force = 0x100, sensor = 0x8000 };

inline std::uint64_t stream(std::size_t recording_number, Draws draws, std::size_t number = 0) {
  return ((static_cast<std::uint64_t>(recording_number) + 1) << 16) + static_cast<std::uint64_t>(draws) + number;
}

}  // namespace stillmass::simulate
