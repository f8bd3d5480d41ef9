#include "recording/input_file.hpp"

#include <cerrno>
#include <system_error>

#include <fcntl.h>
#include <sys/stat.h>
#include <unistd.h>

#include "stillmass/base/error.hpp"
#include "stillmass/base/text.hpp"

namespace stillmass::recording {
namespace {

std::string reason(int code) { return std::generic_category().message(code); }

const char* kind_of(mode_t mode) {
  if (S_ISDIR(mode)) return "a folder";
  if (S_ISFIFO(mode)) return "a pipe";
  if (S_ISSOCK(mode)) return "a socket";
  return "a device";
}

}  // namespace

std::shared_ptr<const InputFile> InputFile::open(const std::filesystem::path& path) {
  std::string name = base::printable(path.string());
  const int descriptor = ::open(path.c_str(), O_RDONLY | O_NONBLOCK | O_NOCTTY | O_CLOEXEC);
  if (descriptor < 0) {
    const int code = errno;
    throw base::file_error(name, "cannot be opened: " + reason(code),
                           code == ENOENT ? "check the name" : "check the file's permissions");
  }
  const std::shared_ptr<InputFile> file(new InputFile(descriptor, 0, std::move(name)));
  struct stat status {};
  if (::fstat(descriptor, &status) != 0) throw base::file_error(file->name_, "cannot be read: " + reason(errno));
  if (!S_ISREG(status.st_mode)) {
    throw base::file_error(file->name_, std::string("is ") + kind_of(status.st_mode) + ", not a file",
                           "save the recording to a file and name that");
  }
  file->size_ = status.st_size;
  if (file->size_ == 0) throw base::file_error(file->name_, "is empty", "copy it again from the recorder");
  return file;
}

InputFile::~InputFile() { ::close(descriptor_); }

std::size_t InputFile::read_at(std::int64_t offset, char* to, std::size_t count) const {
  std::size_t done = 0;
  while (done < count) {
    const ssize_t got = ::pread(descriptor_, to + done, count - done, offset + static_cast<std::int64_t>(done));
    if (got < 0 && errno == EINTR) continue;
    if (got < 0) throw base::file_error(name_, "cannot be read: " + reason(errno), "copy it again");
    if (got == 0) break;
    done += static_cast<std::size_t>(got);
  }
  return done;
}

std::string InputFile::read_at(std::int64_t offset, std::size_t count) const {
  std::string bytes(count, '\0');
  bytes.resize(read_at(offset, bytes.data(), count));
  return bytes;
}

}  // namespace stillmass::recording
