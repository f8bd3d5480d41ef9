// Sound files: WAV and its kin, AIFF, FLAC, from seeds of that kind.
#include "fuzz/entry.hpp"

extern "C" int LLVMFuzzerTestOneInput(const std::uint8_t* data, std::size_t size) {
  if (stillmass::tests::is_sound({data, size})) stillmass::tests::check_recording({data, size});
  return 0;
}
