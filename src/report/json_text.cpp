#include "report/json_text.hpp"

#include <cmath>

#include <fmt/format.h>

#include "stillmass/base/text.hpp"

namespace stillmass::report {

JsonText& JsonText::open(char bracket) {
  separate();
  out_ += bracket;
  return *this;
}

JsonText& JsonText::close(char bracket) {
  out_ += bracket;
  return *this;
}

JsonText& JsonText::key(std::string_view name) {
  separate();
  quote(name);
  out_ += ':';
  return *this;
}

JsonText& JsonText::text(std::string_view value) {
  separate();
  quote(value);
  return *this;
}

JsonText& JsonText::number(double value, int digits) {
  separate();
  out_ += std::isfinite(value) ? fmt::format("{:.{}g}", value, digits) : "null";
  return *this;
}

JsonText& JsonText::boolean(bool value) {
  separate();
  out_ += value ? "true" : "false";
  return *this;
}

JsonText& JsonText::null() {
  separate();
  out_ += "null";
  return *this;
}

JsonText& JsonText::numbers(std::span<const double> values, int digits) {
  open('[');
  for (const double value : values) number(value, digits);
  return close(']');
}

/// A comma where a value or key follows another.
void JsonText::separate() {
  if (!out_.empty() && std::string_view("{[:").find(out_.back()) == std::string_view::npos) out_ += ',';
}

void JsonText::quote(std::string_view value) {
  std::string valid;
  if (!base::is_utf8(value)) value = valid = base::latin1_to_utf8(value);
  out_ += '"';
  for (const char c : value) {
    const auto code = static_cast<unsigned char>(c);
    if (c == '"' || c == '\\') {
      out_ += '\\';
      out_ += c;
    } else if (code < 0x20 || c == '<' || c == '>' || c == '&') {
      out_ += fmt::format("\\u{:04x}", code);
    } else {
      out_ += c;
    }
  }
  out_ += '"';
}

}  // namespace stillmass::report
