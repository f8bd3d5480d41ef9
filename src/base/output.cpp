#include "stillmass/base/output.hpp"

#include <algorithm>
#include <cerrno>
#include <cstring>
#include <fstream>
#include <iterator>
#include <system_error>
#include <utility>

#include <fcntl.h>
#include <sys/file.h>
#include <unistd.h>

#include "stillmass/base/digest.hpp"
#include "stillmass/base/error.hpp"
#include "stillmass/base/text.hpp"

namespace stillmass::base {
namespace {

namespace fs = std::filesystem;

constexpr const char* manifest_name = ".stillmass-manifest";
constexpr const char* lock_name = ".stillmass-lock";

Error cannot_write(const fs::path& file, int fault) {
  return file_error(file.string(), std::string("cannot be written: ") + std::strerror(fault),
                    "check the folder's rights and the space left");
}

// Writes all bytes to a new file and waits until they are on the disk.
void write_synced(const fs::path& file, std::string_view bytes) {
  const int fd = ::open(file.c_str(), O_WRONLY | O_CREAT | O_TRUNC | O_CLOEXEC, 0644);
  if (fd < 0) throw cannot_write(file, errno);
  while (!bytes.empty()) {
    const ssize_t written = ::write(fd, bytes.data(), bytes.size());
    if (written < 0 && errno == EINTR) continue;
    if (written < 0) {
      const int fault = errno;
      ::close(fd);
      ::unlink(file.c_str());
      throw cannot_write(file, fault);
    }
    bytes.remove_prefix(static_cast<std::size_t>(written));
  }
  const bool synced = ::fsync(fd) == 0 || errno == EINVAL;
  const int fault = errno;
  if (::close(fd) != 0 || !synced) {
    ::unlink(file.c_str());
    throw cannot_write(file, fault);
  }
}

fs::path temporary_beside(const fs::path& file) {
  return file.parent_path() / ("." + file.filename().string() + "." + std::to_string(::getpid()) + ".tmp");
}

// Lines "HASH  NAME".
std::map<std::string, std::string> read_manifest(const fs::path& file) {
  std::map<std::string, std::string> hashes;
  std::ifstream in(file);
  for (std::string line; std::getline(in, line);) {
    if (line.size() > 66) hashes[line.substr(66)] = line.substr(0, 64);
  }
  return hashes;
}

}  // namespace

void write_whole(const fs::path& file, std::string_view bytes, bool replace) {
  std::error_code ignored;
  if (!replace && fs::exists(fs::symlink_status(file, ignored))) {
    throw file_error(file.string(), "exists already", "choose another name or remove it");
  }
  const fs::path temporary = temporary_beside(file);
  write_synced(temporary, bytes);
  int failed = 0;
  if (replace) {
    failed = ::rename(temporary.c_str(), file.c_str());
  } else {
    // link() refuses to replace a file that appeared in the meantime; rename() would not.
    failed = ::link(temporary.c_str(), file.c_str());
    if (failed != 0 && errno != EEXIST) failed = ::rename(temporary.c_str(), file.c_str());
  }
  const int fault = errno;
  ::unlink(temporary.c_str());
  if (failed != 0) throw cannot_write(file, fault);
}

OutputFolder::OutputFolder(fs::path folder, const std::vector<std::string>& planned) : folder_(std::move(folder)) {
  std::error_code fault;
  if (folder_.filename().empty()) folder_ = folder_.parent_path();
  if (fs::exists(folder_, fault) && !fs::is_directory(folder_, fault)) {
    throw file_error(folder_.string(), "is not a folder", "choose another output folder");
  }
  made_folder_ = fs::create_directories(folder_, fault);
  if (fault) {
    throw file_error(folder_.string(), "the output folder cannot be made: " + fault.message(),
                     "choose another one with --out");
  }
  const fs::path lock = folder_ / lock_name;
  lock_ = ::open(lock.c_str(), O_RDWR | O_CREAT | O_CLOEXEC, 0644);
  if (lock_ < 0) {
    const int reason = errno;
    if (made_folder_) fs::remove(folder_, fault);
    throw cannot_write(folder_, reason);
  }
  try {
    if (::flock(lock_, LOCK_EX | LOCK_NB) != 0) {
      throw file_error(folder_.string(), "another run is writing there", "wait for it to end");
    }
    manifest_ = read_manifest(folder_ / manifest_name);
    for (const std::string& name : planned) check_free(name);
    staging_ = folder_ / (".stillmass-staging-" + std::to_string(::getpid()));
    fs::create_directories(staging_, fault);
    if (fault) throw cannot_write(staging_, fault.value());
  } catch (...) {
    ::close(lock_);
    if (made_folder_) fs::remove_all(folder_, fault);
    throw;
  }
}

OutputFolder::~OutputFolder() {
  std::error_code ignored;
  if (!staging_.empty()) fs::remove_all(staging_, ignored);
  if (lock_ >= 0) {
    fs::remove(folder_ / lock_name, ignored);
    ::close(lock_);
  }
  if (made_folder_ && !committed_) fs::remove(folder_, ignored);
}

void OutputFolder::check_free(const std::string& name) const {
  const fs::path file = folder_ / name;
  std::error_code ignored;
  if (!fs::exists(fs::symlink_status(file, ignored))) return;
  const auto ours = manifest_.find(name);
  if (ours == manifest_.end()) {
    throw file_error(file.string(), "exists and was not written by stillmass", "move it away or choose another --out");
  }
  if (!fs::is_regular_file(file, ignored) || sha256_of_file(file) != ours->second) {
    throw file_error(file.string(), "was changed since stillmass wrote it", "move it away or choose another --out");
  }
}

fs::path OutputFolder::stage(const std::string& name) {
  if (std::find(names_.begin(), names_.end(), name) == names_.end()) {
    check_free(name);
    names_.push_back(name);
  }
  fs::path file = staging_ / name;
  std::error_code fault;
  fs::create_directories(file.parent_path(), fault);
  if (fault) throw cannot_write(file.parent_path(), fault.value());
  return file;
}

void OutputFolder::write(const std::string& name, std::string_view bytes) { write_synced(stage(name), bytes); }

void OutputFolder::commit() {
  std::error_code fault;
  std::map<std::string, std::string> written;
  for (const std::string& name : names_) {
    check_free(name);
    written[name] = sha256_of_file(staging_ / name);
  }
  // The manifest first knows old and new files together, so that a run that is cut short can be run again.
  const auto save = [&](const std::map<std::string, std::string>& hashes) {
    std::string text;
    for (const auto& [name, hash] : hashes) text += hash + "  " + name + "\n";
    write_whole(folder_ / manifest_name, text, true);
  };
  for (const auto& [name, hash] : manifest_) {
    if (written.contains(name)) continue;
    const fs::path old = folder_ / name;
    if (fs::is_regular_file(old, fault) && sha256_of_file(old) == hash) fs::remove(old, fault);
  }
  save(written);
  for (const std::string& name : names_) {
    const fs::path file = folder_ / name;
    fs::create_directories(file.parent_path(), fault);
    fs::rename(staging_ / name, file, fault);
    if (fault) throw cannot_write(file, fault.value());
  }
  committed_ = true;
}

}  // namespace stillmass::base
