#pragma once

#include <filesystem>
#include <memory>
#include <optional>
#include <span>
#include <string>
#include <string_view>
#include <vector>

#include "stillmass/base/interval.hpp"

namespace stillmass::base {

enum class KeyType {
  text,
  number,  ///< integer or float; finite
  integer,
  flag,
  numbers,         ///< array of finite numbers
  texts,           ///< array of strings
  number_or_pair,  ///< a number, or [min, max]
  table,           ///< [name]
  tables,          ///< [[name]]
};

/// One key of a settings file. The path is dotted, without indices: "machine.speed_rpm", "recording.channel.unit".
struct Key {
  std::string_view path{};
  KeyType type = KeyType::text;
  std::string_view unit{};  ///< as written in the file; empty: none
  bool required = false;
  std::string_view default_value{};  ///< for the reference; empty: none
  std::string_view help{};
  std::string_view allowed{};  ///< "a|b|c": the texts allowed; empty: any
  /// Numbers outside are refused; lo == hi: any finite number.
  Interval range{0, 0};
};

/// A strictly read TOML file: bytes scanned first (no control bytes, valid UTF-8, non-ASCII only in strings and
/// comments), every key known, every type right, every number finite and within its range, every required key there.
class Settings {
 public:
  /// One table of the file.
  class Table {
   public:
    bool has(std::string_view key) const;
    /// Values of keys that the key table knows; the `std::optional` is empty where the key is absent.
    std::optional<std::string> text(std::string_view key) const;
    std::optional<double> number(std::string_view key) const;
    std::optional<int> integer(std::string_view key) const;
    std::optional<bool> flag(std::string_view key) const;
    std::optional<Interval> interval(std::string_view key) const;  ///< number_or_pair; a number gives lo == hi
    std::vector<double> numbers(std::string_view key) const;
    std::vector<std::string> texts(std::string_view key) const;
    std::optional<Table> table(std::string_view key) const;
    std::vector<Table> tables(std::string_view key) const;
    /// Line of the key in the file (1-based), or of this table where the key is absent.
    int line(std::string_view key = {}) const;
    /// The error for a value that is well-formed and yet wrong: exit 2, with file and line.
    [[noreturn]] void refuse(std::string_view key, const std::string& what, const std::string& remedy = {}) const;

    struct Node;
    std::shared_ptr<const Node> node;
  };

  /// Throws `Error`: kind `file` where the file cannot be read, `usage` with line where its content is wrong.
  static Settings read(const std::filesystem::path& file, std::span<const Key> keys);
  /// The same from text; `name` stands for the file in errors.
  static Settings parse(std::string_view text, const std::string& name, std::span<const Key> keys);

  const Table& root() const { return root_; }

 private:
  Table root_;
};

}  // namespace stillmass::base
