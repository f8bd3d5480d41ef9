// The bare limit of reading text: blocks of 256 KiB, std::from_chars on every cell, sums kept, nothing checked.
//
//   limit_csv FILE     one header line, commas, one thread

#include <charconv>
#include <cstdio>
#include <cstring>
#include <vector>

#include <fcntl.h>
#include <unistd.h>

#include "timing.hpp"

int main(int argc, char** argv) {
  constexpr std::size_t block = 256 * 1024;
  if (argc != 2) bench::fail("limit_csv FILE");
  const int file = ::open(argv[1], O_RDONLY | O_CLOEXEC);
  if (file < 0) bench::fail("cannot be opened");
  std::vector<char> buffer(2 * block);
  std::size_t held = 0;
  double sum = 0.0;
  bool in_header = true;
  while (true) {
    const ssize_t got = ::read(file, buffer.data() + held, block);
    if (got <= 0) break;
    held += static_cast<std::size_t>(got);
    const char* at = buffer.data();
    const char* end = at + held;
    while (end > at && end[-1] != '\n') --end;
    if (in_header) {
      at = static_cast<const char*>(std::memchr(at, '\n', held)) + 1;
      in_header = false;
    }
    while (at < end) {
      double value = 0.0;
      at = std::from_chars(at, end, value).ptr + 1;
      sum += value;
    }
    held -= static_cast<std::size_t>(end - buffer.data());
    std::memmove(buffer.data(), end, held);
  }
  std::printf("%g\n", sum);
  return 0;
}
