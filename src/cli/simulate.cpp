#include "stillmass/simulate/simulate.hpp"

#include <filesystem>

#include <unistd.h>

#include "stillmass/simulate/truth.hpp"

#include "cli/commands.hpp"
#include "cli/exit_code.hpp"

namespace stillmass::cli {
namespace {

namespace fs = std::filesystem;

// A folder beside the recordings' place that goes away with whatever is left in it.
class Workshop {
 public:
  explicit Workshop(const fs::path& beside) : path_(beside / (".stillmass-simulate-" + std::to_string(::getpid()))) {
    std::error_code fault;
    fs::create_directories(path_, fault);
    if (fault) throw base::file_error(beside.string(), "cannot be written: " + fault.message(), "choose another --out");
  }
  ~Workshop() {
    std::error_code ignored;
    fs::remove_all(path_, ignored);
  }
  Workshop(const Workshop&) = delete;
  Workshop& operator=(const Workshop&) = delete;

  const fs::path& path() const { return path_; }

 private:
  fs::path path_;
};

}  // namespace

int run_simulate(Session& session) {
  const simulate::SkidFile skid = simulate::read_skid_file(session.arguments().files.front());
  const fs::path folder = session.arguments().text("--out").value_or(".");
  for (const simulate::PlannedRecording& recording : skid.recordings) {
    std::error_code ignored;
    if (fs::exists(folder / recording.file, ignored)) {
      throw base::file_error((folder / recording.file).string(), "exists already",
                             "move it away or choose another --out");
    }
  }
  const Workshop workshop(folder);
  for (const fs::path& made : simulate::write_recordings(skid, workshop.path(), session.context())) {
    const fs::path place = folder / made.filename();
    std::error_code fault;
    fs::rename(made, place, fault);
    if (fault) throw base::file_error(place.string(), "cannot be written: " + fault.message());
    session.print(place.string() + "\n");
  }
  if (const auto file = session.arguments().text("--truth")) {
    base::write_whole(*file, simulate::truth_toml(simulate::truth_of(skid)));
  }
  return done;
}

}  // namespace stillmass::cli
