#include "stillmass/base/tables.hpp"

#include <string>

#include "stillmass/base/error.hpp"

namespace stillmass::base {

std::vector<Settings::Table> table_rows(std::string_view file_name, std::span<const Key> keys) {
  const std::string name = "data/tables/" + std::string(file_name);
  const std::string_view text = table_text(file_name);
  if (text.empty()) throw Error(ErrorKind::internal, name, "the table is not in the program");
  try {
    std::vector<Settings::Table> rows = Settings::parse(text, name, keys).root().tables("row");
    for (const Settings::Table& row : rows) {
      if (!row.has("source")) row.refuse("source", "a row without its source");
    }
    return rows;
  } catch (const Error& error) {
    throw Error(ErrorKind::internal, error.where, error.problem, error.remedy, error.line);
  }
}

}  // namespace stillmass::base
