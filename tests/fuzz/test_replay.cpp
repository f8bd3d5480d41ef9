#include <algorithm>
#include <chrono>
#include <fstream>
#include <iterator>
#include <vector>

#include <sys/resource.h>

#include "fuzz/entry.hpp"
#include "support/catch.hpp"
#include "support/demo.hpp"

using namespace stillmass::tests;
namespace fs = std::filesystem;

namespace {

constexpr double slowest_s = 5.0;  // the fuzzer calls it a hang, tests/fuzz/CMakeLists.txt
constexpr long most_memory_kib = 400 * 1024;

fs::path here() { return demo_file("../../tests/fuzz").lexically_normal(); }

// None where the folder is not there: no case is kept.
std::vector<fs::path> files_in(const fs::path& folder) {
  std::vector<fs::path> files;
  if (!fs::exists(folder)) return files;
  for (const auto& entry : fs::directory_iterator(folder)) files.push_back(entry.path());
  std::sort(files.begin(), files.end());
  return files;
}

std::vector<std::uint8_t> bytes_of(const fs::path& file) {
  std::ifstream in(file, std::ios::binary);
  return {std::istreambuf_iterator<char>(in), std::istreambuf_iterator<char>()};
}

long peak_memory_kib() {
  rusage usage{};
  getrusage(RUSAGE_SELF, &usage);
  return usage.ru_maxrss;
}

template <class Entry>
std::size_t replay(const fs::path& folder, Entry&& entry) {
  const std::vector<fs::path> files = files_in(folder);
  for (const fs::path& file : files) {
    INFO(file.filename().string());
    const std::vector<std::uint8_t> bytes = bytes_of(file);
    const auto begin = std::chrono::steady_clock::now();
    CHECK_NOTHROW(entry(Bytes(bytes)));
    CHECK(std::chrono::duration<double>(std::chrono::steady_clock::now() - begin).count() < slowest_s);
#ifdef NDEBUG  // a sanitizer's own memory does not count
    CHECK(peak_memory_kib() < most_memory_kib);
#endif
  }
  return files.size();
}

}  // namespace

TEST_CASE("no text that once broke the reader breaks it again") {
  replay(here() / "cases" / "text", check_recording);
  CHECK(replay(here() / "seeds" / "text", check_recording) >= 10);
}

TEST_CASE("no sound file that once broke the reader breaks it again") {
  replay(here() / "cases" / "sound", check_recording);
  CHECK(replay(here() / "seeds" / "sound", check_recording) >= 8);
}

TEST_CASE("no survey file that once broke the reader breaks it again") {
  replay(here() / "cases" / "survey", read_survey_file);
  CHECK(replay(here() / "seeds" / "survey", read_survey_file) >= 3);
}

TEST_CASE("broken recordings end in an error, not in a crash") {
  CHECK(replay(here() / ".." / "broken" / "recording", check_recording) >= 18);
}

TEST_CASE("most seeds of the fuzzers are taken: what is varied is not noise") {
  for (const char* kind : {"text", "sound", "survey"}) {
    const std::vector<fs::path> files = files_in(here() / "seeds" / kind);
    const auto taken = std::count_if(files.begin(), files.end(), [&](const fs::path& file) {
      const std::vector<std::uint8_t> bytes = bytes_of(file);
      const std::string answer = std::string_view(kind) == "survey" ? read_survey_file(bytes) : check_recording(bytes);
      if (!answer.empty()) WARN(file.filename().string() << ": " << answer);
      return answer.empty();
    });
    INFO(kind);
    CHECK(static_cast<std::size_t>(taken) >= files.size() * 9 / 10);
  }
}
