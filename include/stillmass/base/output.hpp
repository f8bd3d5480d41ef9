#pragma once

#include <filesystem>
#include <map>
#include <string>
#include <string_view>
#include <vector>

namespace stillmass::base {

/// Writes `bytes` to `file` whole or not at all: a temporary beside it, synced, renamed. The folder must exist. With
/// `replace` false an existing file is an error and stays as it was. Throws `Error` of kind `file`.
void write_whole(const std::filesystem::path& file, std::string_view bytes, bool replace = false);

/// A folder of results that appears whole or not at all. Files are gathered in a hidden folder beside it and moved on
/// `commit`, the file named last going last. What is in the folder already is replaced only if this program wrote it
/// and nobody changed it since: a manifest with hashes (`.stillmass-manifest`) says so. One writer at a time: a lock.
class OutputFolder {
 public:
  /// Opens and locks at once, so that a folder that cannot be written fails before the long work.
  /// Throws `Error` of kind `file`: cannot be made or written, is being written by another, holds changed or foreign
  /// files under a name in `planned`.
  OutputFolder(std::filesystem::path folder, const std::vector<std::string>& planned);
  ~OutputFolder();
  OutputFolder(const OutputFolder&) = delete;
  OutputFolder& operator=(const OutputFolder&) = delete;

  /// Where to write the file of that name ("csv/spectrum.csv") now; its folders exist.
  std::filesystem::path stage(const std::string& name);
  void write(const std::string& name, std::string_view bytes);
  /// Moves everything into place. Files of an earlier run that this run did not write again are removed if unchanged.
  void commit();

  const std::filesystem::path& folder() const { return folder_; }

 private:
  void check_free(const std::string& name) const;

  std::filesystem::path folder_;
  std::filesystem::path staging_;
  std::vector<std::string> names_;
  std::map<std::string, std::string> manifest_;
  int lock_ = -1;
  bool made_folder_ = false;
  bool committed_ = false;
};

}  // namespace stillmass::base
