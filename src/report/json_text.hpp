#pragma once

#include <span>
#include <string>
#include <string_view>

namespace stillmass::report {

/// Writes JSON that may stand inside a script element of HTML: `<`, `>` and `&` as \uXXXX, text that is not UTF-8
/// replaced, a number that is not finite as null. Commas come by themselves:
///
///   JsonText json;
///   json.open('{').key("x").number(3.0).key("y").open('[').close(']').close('}');
class JsonText {
 public:
  JsonText& open(char bracket);
  JsonText& close(char bracket);
  JsonText& key(std::string_view name);
  JsonText& text(std::string_view value);
  /// Seven significant digits are finer than a pixel of any screen, and short.
  JsonText& number(double value, int digits = 7);
  JsonText& boolean(bool value);
  JsonText& null();
  JsonText& numbers(std::span<const double> values, int digits = 7);

  const std::string& str() const { return out_; }

 private:
  void separate();
  void quote(std::string_view value);

  std::string out_;
};

}  // namespace stillmass::report
