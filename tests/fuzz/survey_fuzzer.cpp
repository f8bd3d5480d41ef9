// Survey files.
#include "fuzz/entry.hpp"

extern "C" int LLVMFuzzerTestOneInput(const std::uint8_t* data, std::size_t size) {
  stillmass::tests::read_survey_file({data, size});
  return 0;
}
