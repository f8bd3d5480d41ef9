// The bare limit of reading sound: libsndfile's own reading in blocks of 64 KiB, nothing else.
//
//   limit_sound FILE float|int     one thread

#include <cstdio>
#include <string_view>
#include <vector>

#include <sndfile.h>

#include "timing.hpp"

int main(int argc, char** argv) {
  constexpr std::size_t block = 64 * 1024;
  if (argc != 3) bench::fail("limit_sound FILE float|int");
  SF_INFO info{};
  SNDFILE* const sound = sf_open(argv[1], SFM_READ, &info);
  if (sound == nullptr) bench::fail("cannot be opened");
  const auto frames = static_cast<sf_count_t>(block / sizeof(float)) / info.channels;
  sf_count_t total = 0;
  if (std::string_view(argv[2]) == "float") {
    std::vector<float> buffer(block / sizeof(float));
    while (const sf_count_t got = sf_readf_float(sound, buffer.data(), frames)) total += got;
  } else {
    std::vector<int> buffer(block / sizeof(int));
    while (const sf_count_t got = sf_readf_int(sound, buffer.data(), frames)) total += got;
  }
  std::printf("%lld\n", static_cast<long long>(total));
  sf_close(sound);
  return 0;
}
