#pragma once

#include <optional>
#include <stdexcept>
#include <string>

namespace stillmass::base {

/// Who must act on an error; the program's exit code follows from it (DEVELOPERS.md).
enum class ErrorKind {
  usage,     ///< wrong call or wrong survey file: exit 2
  file,      ///< a file cannot be read, understood or written: exit 3
  internal,  ///< a fault of the program itself: exit 70
};

/// A fault that stops the work. Its text is one line: "WHERE[:LINE]: WHAT; REMEDY".
class Error : public std::runtime_error {
 public:
  /// where: a file's name or an option's; may be empty. remedy: what the user can do; may be empty.
  Error(ErrorKind kind, std::string where, std::string what, std::string remedy = {}, std::optional<int> line = {});

  ErrorKind kind;
  std::string where;
  std::string problem;
  std::string remedy;
  std::optional<int> line;
};

/// Shorthand for the two kinds that users cause.
Error usage_error(std::string where, std::string what, std::string remedy = {}, std::optional<int> line = {});
Error file_error(std::string where, std::string what, std::string remedy = {}, std::optional<int> line = {});

/// Thrown by `Context::check_stop` when the user asked to stop; not a fault.
class Stopped : public std::runtime_error {
 public:
  Stopped() : std::runtime_error("stopped") {}
};

}  // namespace stillmass::base
