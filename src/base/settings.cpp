#include "stillmass/base/settings.hpp"

#include <algorithm>
#include <cmath>
#include <fstream>
#include <iterator>
#include <sstream>
#include <utility>

// Where toml++ 3.3 asserts ("[+a]"), its code goes on to a proper error; but with NDEBUG a compiler may take the claim
// for granted, and without it the program aborts. So its claims are neither checked nor believed.
#undef NDEBUG
#define TOML_ASSERT(claim) static_assert(true)
#include <toml++/toml.h>

#include "stillmass/base/error.hpp"
#include "stillmass/base/number.hpp"
#include "stillmass/base/text.hpp"

namespace stillmass::base {

namespace {

struct File {
  std::string name;
  toml::table content;
};

}  // namespace

struct Settings::Table::Node {
  std::shared_ptr<const File> file;
  const toml::table* table = nullptr;
};

namespace {

namespace fs = std::filesystem;

int line_of(const toml::node& node) { return static_cast<int>(node.source().begin.line); }

// toml++ 3.3 aborts on some bytes that TOML forbids anyway, so they are refused here first: control bytes, and
// non-ASCII outside strings and comments. So are keys of more parts than any table of keys has: tables within tables
// are visited and destroyed by recursion. Follows the quoting of TOML 1.0 far enough to know what is inside a string.
void scan_bytes(std::string_view text, const std::string& name) {
  constexpr int most_dots = 16;  // of one key
  int line = 1;
  const auto refuse = [&](const std::string& what) {
    throw usage_error(name, what, "mend the line in a text editor", line);
  };
  if (!is_utf8(text)) {
    std::string_view rest = text;
    for (auto end = rest.find('\n'); end != std::string_view::npos && is_utf8(rest.substr(0, end));
         end = rest.find('\n')) {
      rest.remove_prefix(end + 1);
      ++line;
    }
    refuse("text that is not UTF-8");
  }
  char quote = 0;
  bool triple = false;
  bool comment = false;
  int dots = 0;
  for (std::size_t i = 0; i < text.size(); ++i) {
    const char c = text[i];
    const auto byte = static_cast<unsigned char>(c);
    if (c == '\n') {
      ++line;
      comment = false;
      dots = 0;
      if (!triple) quote = 0;
      continue;
    }
    const bool carriage_return = c == '\r' && i + 1 < text.size() && text[i + 1] == '\n';
    if ((byte < 0x20 && c != '\t' && !carriage_return) || byte == 0x7F) refuse("a control character");
    if (byte >= 0x80 && quote == 0 && !comment) {
      if (i == 0 && text.starts_with("\xEF\xBB\xBF")) {
        i += 2;
        continue;
      }
      refuse("a letter outside ASCII that is not in quotes");
    }
    if (comment) continue;
    if (quote != 0) {
      if (c == '\\' && quote == '"') {
        if (i + 1 < text.size() && text[i + 1] != '\n') ++i;
      } else if (c == quote && (!triple || text.substr(i, 3) == std::string(3, quote))) {
        if (triple) {  // up to two quotes more belong to the text
          i += 2;
          for (int more = 0; more < 2 && i + 1 < text.size() && text[i + 1] == c; ++more) ++i;
        }
        quote = 0;
        triple = false;
      }
    } else if (c == '#') {
      comment = true;
    } else if (c == '.') {
      if (++dots > most_dots) refuse("a key of too many parts");
    } else if (std::string_view(",=[]{}").find(c) != std::string_view::npos) {
      dots = 0;
    } else if (c == '"' || c == '\'') {
      quote = c;
      triple = text.substr(i, 3) == std::string(3, c);
      if (triple) i += 2;
    }
  }
}

toml::table parsed(std::string_view text, const std::string& name) {
  try {
    return toml::parse(text, name);
  } catch (const toml::parse_error& error) {
    throw usage_error(name, std::string(error.description()), {}, static_cast<int>(error.source().begin.line));
  }
}

// Letters outside ASCII may stand where scan_bytes sees a string and toml++ does not (a = 0'''...), and there it
// is not safe. With question marks in their place the parser itself says whether they stand in strings and comments
// only.
void check_letters_in_strings(std::string_view text, const std::string& name) {
  if (text.starts_with("\xEF\xBB\xBF")) text.remove_prefix(3);
  const auto outside_ascii = [](char c) { return static_cast<unsigned char>(c) >= 0x80; };
  if (std::none_of(text.begin(), text.end(), outside_ascii)) return;
  std::string masked(text);
  std::replace_if(masked.begin(), masked.end(), outside_ascii, '?');
  parsed(masked, name);
}

std::string_view what_is(KeyType type) {
  switch (type) {
    case KeyType::text:
      return "a text in quotes";
    case KeyType::number:
      return "a number";
    case KeyType::integer:
      return "a whole number";
    case KeyType::flag:
      return "true or false";
    case KeyType::numbers:
      return "a list of numbers";
    case KeyType::texts:
      return "a list of texts";
    case KeyType::number_or_pair:
      return "a number or [min, max]";
    case KeyType::table:
      return "a table [name]";
    case KeyType::tables:
      return "tables [[name]]";
  }
  return "";
}

bool is_number(const toml::node& node) { return node.is_integer() || node.is_floating_point(); }

bool all_of(const toml::node& node, bool (*test)(const toml::node&)) {
  const toml::array* list = node.as_array();
  return list != nullptr && std::all_of(list->begin(), list->end(), [&](const toml::node& each) { return test(each); });
}

bool has_type(const toml::node& node, KeyType type) {
  switch (type) {
    case KeyType::text:
      return node.is_string();
    case KeyType::number:
      return is_number(node);
    case KeyType::integer:
      return node.is_integer();
    case KeyType::flag:
      return node.is_boolean();
    case KeyType::numbers:
      return all_of(node, is_number);
    case KeyType::texts:
      return all_of(node, [](const toml::node& each) { return each.is_string(); });
    case KeyType::number_or_pair:
      return is_number(node) || (all_of(node, is_number) && node.as_array()->size() == 2);
    case KeyType::table:
      return node.is_table();
    case KeyType::tables:
      return all_of(node, [](const toml::node& each) { return each.is_table(); });
  }
  return false;
}

// Checks one file against the table of keys.
class Checker {
 public:
  Checker(const std::string& name, std::span<const Key> keys) : name_(name), keys_(keys) {}

  void check(const toml::table& table, const std::string& path, int table_line) const {
    for (const auto& [toml_key, value] : table) {
      const std::string key_path = joined(path, toml_key.str());
      const Key* key = find(key_path);
      // toml++ 3.3 gives no position to a dotted parent; its own first child then has one.
      const int line = line_of(value) > 0 ? line_of(value) : table_line;
      if (key == nullptr) refuse_unknown(key_path, path, line);
      if (!has_type(value, key->type)) {
        throw usage_error(name_, quoted(key_path) + " must be " + std::string(what_is(key->type)), {}, line);
      }
      check_value(value, *key, key_path, line);
    }
    for (const Key& key : keys_) {
      if (key.required && parent(key.path) == path && !table.contains(last(key.path))) {
        throw usage_error(name_, quoted(key.path) + " is missing", std::string(key.help), table_line);
      }
    }
  }

 private:
  static std::string joined(const std::string& path, std::string_view key) {
    return path.empty() ? std::string(key) : path + "." + std::string(key);
  }
  static std::string quoted(std::string_view key) { return "'" + std::string(key) + "'"; }
  static std::string_view parent(std::string_view path) {
    const auto dot = path.rfind('.');
    return dot == std::string_view::npos ? std::string_view{} : path.substr(0, dot);
  }
  static std::string_view last(std::string_view path) {
    const auto dot = path.rfind('.');
    return dot == std::string_view::npos ? path : path.substr(dot + 1);
  }

  const Key* find(std::string_view path) const {
    const auto at = std::find_if(keys_.begin(), keys_.end(), [&](const Key& key) { return key.path == path; });
    return at == keys_.end() ? nullptr : &*at;
  }

  [[noreturn]] void refuse_unknown(const std::string& key_path, const std::string& path, int line) const {
    std::vector<std::string_view> near;
    for (const Key& key : keys_) {
      if (parent(key.path) == path) near.push_back(last(key.path));
    }
    const std::string_view meant = nearest_name(last(key_path), near);
    std::string remedy;
    if (!meant.empty()) {
      remedy = "did you mean " + quoted(meant) + "?";
    } else {
      for (const std::string_view each : near) remedy += (remedy.empty() ? "known here: " : ", ") + std::string(each);
    }
    throw usage_error(name_, "unknown key " + quoted(key_path), remedy, line);
  }

  void check_value(const toml::node& value, const Key& key, const std::string& path, int line) const {
    if (const toml::table* inner = value.as_table()) {
      check(*inner, path, line);
    } else if (const toml::array* list = value.as_array()) {
      for (const toml::node& each : *list) check_value(each, key, path, line_of(each) > 0 ? line_of(each) : line);
      if (key.type == KeyType::number_or_pair && number_in(*list->get(0)) > number_in(*list->get(1))) {
        throw usage_error(name_, quoted(path) + ": the first number must not be above the second", {}, line);
      }
    } else if (is_number(value)) {
      check_number(number_in(value), key, path, line);
    } else if (value.is_string() && !key.allowed.empty()) {
      const std::vector<std::string_view> allowed = split(key.allowed, '|');
      const std::string& given = value.as_string()->get();
      if (std::find(allowed.begin(), allowed.end(), given) == allowed.end()) {
        std::string choice;
        for (const std::string_view each : allowed)
          choice += (choice.empty() ? "\"" : ", \"") + std::string(each) + "\"";
        throw usage_error(name_, quoted(path) + " must be one of " + choice, {}, line);
      }
    }
  }

  void check_number(double number, const Key& key, const std::string& path, int line) const {
    if (!std::isfinite(number)) throw usage_error(name_, quoted(path) + " must be a finite number", {}, line);
    if (key.range.lo < key.range.hi && !key.range.contains(number)) {
      throw usage_error(name_,
                        quoted(path) + " = " + shortest(number) + " is outside " + shortest(key.range.lo) + " to " +
                            shortest(key.range.hi) + (key.unit.empty() ? "" : " " + std::string(key.unit)),
                        {}, line);
    }
  }

  static double number_in(const toml::node& node) { return *node.value<double>(); }

  const std::string& name_;
  std::span<const Key> keys_;
};

const toml::node* find_node(const Settings::Table::Node& node, std::string_view key) { return node.table->get(key); }

}  // namespace

bool Settings::Table::has(std::string_view key) const { return find_node(*node, key) != nullptr; }

std::optional<std::string> Settings::Table::text(std::string_view key) const {
  const toml::node* found = find_node(*node, key);
  return found == nullptr ? std::nullopt : found->value<std::string>();
}

std::optional<double> Settings::Table::number(std::string_view key) const {
  const toml::node* found = find_node(*node, key);
  return found == nullptr ? std::nullopt : found->value<double>();
}

std::optional<int> Settings::Table::integer(std::string_view key) const {
  const toml::node* found = find_node(*node, key);
  if (found == nullptr) return {};
  const auto value = found->value<int>();
  if (!value) refuse(key, "'" + std::string(key) + "' is too large");
  return value;
}

std::optional<bool> Settings::Table::flag(std::string_view key) const {
  const toml::node* found = find_node(*node, key);
  return found == nullptr ? std::nullopt : found->value<bool>();
}

std::optional<Interval> Settings::Table::interval(std::string_view key) const {
  const toml::node* found = find_node(*node, key);
  if (found == nullptr) return {};
  if (const toml::array* pair = found->as_array()) {
    return Interval{*pair->get(0)->value<double>(), *pair->get(1)->value<double>()};
  }
  const double both = *found->value<double>();
  return Interval{both, both};
}

std::vector<double> Settings::Table::numbers(std::string_view key) const {
  std::vector<double> out;
  if (const toml::node* found = find_node(*node, key)) {
    for (const toml::node& each : *found->as_array()) out.push_back(*each.value<double>());
  }
  return out;
}

std::vector<std::string> Settings::Table::texts(std::string_view key) const {
  std::vector<std::string> out;
  if (const toml::node* found = find_node(*node, key)) {
    for (const toml::node& each : *found->as_array()) out.push_back(*each.value<std::string>());
  }
  return out;
}

std::optional<Settings::Table> Settings::Table::table(std::string_view key) const {
  const toml::node* found = find_node(*node, key);
  if (found == nullptr) return {};
  return Table{std::make_shared<Node>(Node{node->file, found->as_table()})};
}

std::vector<Settings::Table> Settings::Table::tables(std::string_view key) const {
  std::vector<Table> out;
  if (const toml::node* found = find_node(*node, key)) {
    for (const toml::node& each : *found->as_array()) {
      out.push_back({std::make_shared<Node>(Node{node->file, each.as_table()})});
    }
  }
  return out;
}

int Settings::Table::line(std::string_view key) const {
  const toml::node* found = key.empty() ? nullptr : find_node(*node, key);
  const int own = line_of(*node->table);
  if (found == nullptr) return own > 0 ? own : 1;
  return line_of(*found) > 0 ? line_of(*found) : own;
}

void Settings::Table::refuse(std::string_view key, const std::string& what, const std::string& remedy) const {
  throw usage_error(node->file->name, what, remedy, line(key));
}

Settings Settings::parse(std::string_view text, const std::string& name, std::span<const Key> keys) {
  scan_bytes(text, name);
  check_letters_in_strings(text, name);
  auto file = std::make_shared<File>();
  file->name = name;
  file->content = parsed(text, name);
  Checker(name, keys).check(file->content, "", 1);
  Settings settings;
  const toml::table* root = &file->content;
  settings.root_.node = std::make_shared<Table::Node>(Table::Node{std::move(file), root});
  return settings;
}

Settings Settings::read(const fs::path& file, std::span<const Key> keys) {
  std::error_code fault;
  if (!fs::exists(file, fault)) throw usage_error(file.string(), "there is no such file");
  if (!fs::is_regular_file(file, fault)) throw usage_error(file.string(), "is not a file");
  if (const auto size = fs::file_size(file, fault); fault || size > (std::uintmax_t{4} << 20)) {
    throw usage_error(file.string(), "is too large for a settings file");
  }
  std::ifstream in(file, std::ios::binary);
  if (!in) throw file_error(file.string(), "cannot be read", "check its rights");
  std::ostringstream text;
  text << in.rdbuf();
  return parse(text.str(), file.string(), keys);
}

}  // namespace stillmass::base
