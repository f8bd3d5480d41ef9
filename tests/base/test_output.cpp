#include <algorithm>

#include "stillmass/base/error.hpp"
#include "stillmass/base/output.hpp"

#include "support/catch.hpp"
#include "support/temporary_folder.hpp"

using namespace stillmass::base;
using stillmass::tests::read_file;
using stillmass::tests::TemporaryFolder;
using stillmass::tests::write_file;
namespace fs = std::filesystem;

namespace {

std::vector<std::string> entries(const fs::path& folder) {
  std::vector<std::string> names;
  for (const auto& entry : fs::recursive_directory_iterator(folder)) {
    names.push_back(fs::relative(entry.path(), folder).string());
  }
  std::sort(names.begin(), names.end());
  return names;
}

}  // namespace

TEST_CASE("a file is written whole and never over another") {
  const TemporaryFolder folder;
  write_whole(folder / "a.txt", "one");
  CHECK(read_file(folder / "a.txt") == "one");
  CHECK_THROWS_WITH(write_whole(folder / "a.txt", "two"), Catch::Contains("exists already"));
  CHECK(read_file(folder / "a.txt") == "one");
  write_whole(folder / "a.txt", "three", true);
  CHECK(read_file(folder / "a.txt") == "three");
  CHECK_THROWS_AS(write_whole(folder / "none" / "b.txt", "x"), Error);
  CHECK(entries(folder.path()) == std::vector<std::string>{"a.txt"});
}

TEST_CASE("an output folder that is not committed leaves nothing behind") {
  const TemporaryFolder folder;
  {
    OutputFolder out(folder / "r", {"result.json"});
    out.write("csv/x.csv", "1");
    out.write("result.json", "{}");
  }
  CHECK(entries(folder.path()).empty());
}

TEST_CASE("an output folder replaces what it wrote and nothing else") {
  const TemporaryFolder folder;
  {
    OutputFolder out(folder / "r", {"result.json"});
    out.write("csv/x.csv", "1");
    out.write("result.json", "{}");
    out.commit();
  }
  CHECK(read_file(folder / "r/result.json") == "{}");
  {
    OutputFolder out(folder / "r", {"result.json"});
    out.write("result.json", "{2}");
    out.commit();
  }
  CHECK(read_file(folder / "r/result.json") == "{2}");
  CHECK_FALSE(fs::exists(folder / "r/csv/x.csv"));

  SECTION("a file changed by hand is kept") {
    write_file(folder / "r/result.json", "mine");
    CHECK_THROWS_WITH(OutputFolder(folder / "r", {"result.json"}), Catch::Contains("was changed"));
    CHECK(read_file(folder / "r/result.json") == "mine");
  }
  SECTION("a foreign file is kept") {
    write_file(folder / "r/report.html", "mine");
    CHECK_THROWS_WITH(OutputFolder(folder / "r", {"report.html"}), Catch::Contains("not written by stillmass"));
    CHECK(read_file(folder / "r/report.html") == "mine");
  }
  SECTION("one writer at a time") {
    const OutputFolder first(folder / "r", {});
    CHECK_THROWS_WITH(OutputFolder(folder / "r", {}), Catch::Contains("another run"));
  }
}

TEST_CASE("an output folder that cannot be made fails at once") {
  const TemporaryFolder folder;
  write_file(folder / "file", "x");
  CHECK_THROWS_AS(OutputFolder(folder / "file", {}), Error);
  CHECK_THROWS_AS(OutputFolder(folder / "file" / "below", {}), Error);
}
