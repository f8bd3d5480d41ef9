#include "stillmass/base/error.hpp"

#include <utility>

#include "stillmass/base/text.hpp"

namespace stillmass::base {
namespace {

// What a file says of itself may be megabytes long.
std::string clipped(const std::string& text) {
  constexpr std::size_t most = 1000;
  std::string out = printable(text);
  if (out.size() <= most) return out;
  std::size_t end = most;
  while ((static_cast<unsigned char>(out[end]) & 0xC0) == 0x80) --end;  // not within a letter
  return out.substr(0, end) + "...";
}

std::string one_line(const std::string& where, std::optional<int> line, const std::string& what,
                     const std::string& remedy) {
  std::string text = where;
  if (line) text += ":" + std::to_string(*line);
  if (!text.empty()) text += ": ";
  text += clipped(what);
  if (!remedy.empty()) text += "; " + remedy;
  return printable(text);
}

}  // namespace

Error::Error(ErrorKind error_kind, std::string error_where, std::string what, std::string error_remedy,
             std::optional<int> error_line)
    : std::runtime_error(one_line(error_where, error_line, what, error_remedy)),
      kind(error_kind),
      where(std::move(error_where)),
      problem(std::move(what)),
      remedy(std::move(error_remedy)),
      line(error_line) {}

Error usage_error(std::string where, std::string what, std::string remedy, std::optional<int> line) {
  return {ErrorKind::usage, std::move(where), std::move(what), std::move(remedy), line};
}

Error file_error(std::string where, std::string what, std::string remedy, std::optional<int> line) {
  return {ErrorKind::file, std::move(where), std::move(what), std::move(remedy), line};
}

}  // namespace stillmass::base
