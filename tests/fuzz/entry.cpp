#include "fuzz/entry.hpp"

#include <algorithm>
#include <optional>
#include <string_view>

#include "stillmass/base/error.hpp"
#include "stillmass/base/text.hpp"
#include "stillmass/recording/reader.hpp"
#include "stillmass/report/result_json.hpp"
#include "stillmass/report/terminal.hpp"
#include "stillmass/step/check.hpp"
#include "stillmass/survey/survey_file.hpp"

#include "fuzz/memory_file.hpp"
#include "recording/sound_recording.hpp"
#include "support/temporary_folder.hpp"

namespace stillmass::tests {
namespace {

constexpr double some_rate_hz = 1000.0;
constexpr std::size_t overview_columns = 50;
constexpr std::size_t piece_frames = 100;

void must_be_printable(std::string_view text, bool line_breaks, const char* what) {
  const bool control = std::any_of(text.begin(), text.end(), [&](char c) {
    const auto byte = static_cast<unsigned char>(c);
    return (byte < 0x20 && !(line_breaks && c == '\n')) || byte == 0x7F;
  });
  if (control || !base::is_utf8(text)) throw BrokenPromise(std::string(what) + ": " + base::printable(text));
}

template <class Work>
std::string answer_of(Work&& work) {
  try {
    work();
  } catch (const base::Stopped&) {
    return "stopped";
  } catch (const base::Error& error) {
    if (error.kind == base::ErrorKind::internal) throw;
    must_be_printable(error.what(), false, "an error that is not one line of printable text");
    return error.what();
  }
  return {};
}

void check_file(const std::filesystem::path& file, std::optional<double> rate_hz) {
  recording::OpenOptions options;
  options.rate_hz = rate_hz;
  const auto reader = recording::open(file, options);

  step::CheckRequest request;
  request.overview_columns = overview_columns;
  const std::vector<step::CheckResult> results = {step::check(*reader, request, {})};
  must_be_printable(report::text(results.front()), true, "a result that is not printable text");
  report::Envelope envelope;
  envelope.command = "check";
  envelope.inputs.push_back(reader->recording());
  must_be_printable(report::json(envelope, results), true, "JSON that is not printable text");

  recording::Chunk chunk;
  reader->seek(reader->recording().frames / 2);
  reader->next(chunk, piece_frames);
}

}  // namespace

std::string check_recording(Bytes bytes) {
  const MemoryFile file(bytes);
  std::string answer = answer_of([&] { check_file(file.path(), {}); });
  if (answer.find("--rate HZ") == std::string::npos) return answer;
  return answer_of([&] { check_file(file.path(), some_rate_hz); });
}

bool is_sound(Bytes bytes) {
  constexpr std::size_t looked_at = 4;
  const Bytes head = bytes.first(std::min(bytes.size(), looked_at));
  return recording::is_sound(std::string(head.begin(), head.end()));
}

std::string read_survey_file(Bytes bytes) {
  static const TemporaryFolder folder;
  static const bool prepared = [] {
    write_file(folder / "a.wav", "");
    write_file(folder / "b.csv", "");
    return true;
  }();
  static_cast<void>(prepared);
  write_file(folder / "survey.toml", std::string(bytes.begin(), bytes.end()));
  return answer_of([] { survey::read_survey(folder / "survey.toml"); });
}

}  // namespace stillmass::tests
