#include "stillmass/report/spec_sheet.hpp"

#include <fmt/format.h>

#include "stillmass/report/page.hpp"

#include "report/markup.hpp"

namespace stillmass::report {

namespace {

std::string rows_html(const std::vector<SpecRow>& rows) {
  if (rows.empty()) return {};
  std::string out =
      "<div class=\"wide\">\n<table>\n<thead><tr><th scope=\"col\">Item</th><th scope=\"col\">Value</th>"
      "<th scope=\"col\">Tolerance</th><th scope=\"col\">Note</th></tr></thead>\n<tbody>\n";
  for (const SpecRow& row : rows) {
    out += fmt::format("<tr><td>{}</td><td>{}</td><td>{}</td><td>{}</td></tr>\n", escaped(row.item), escaped(row.value),
                       escaped(row.tolerance), escaped(row.note));
  }
  return out + "</tbody>\n</table>\n</div>\n";
}

}  // namespace

std::string html(const SpecSheet& sheet) {
  std::string out = "<section class=\"sheet\">\n";
  if (!sheet.title.empty()) out += fmt::format("<h3>{}</h3>\n", escaped(sheet.title));
  if (!sheet.purpose.empty()) out += fmt::format("<p>{}</p>\n", escaped(sheet.purpose));
  out += rows_html(sheet.rows);
  if (sheet.drawing) out += fmt::format("<figure class=\"drawing\">\n{}</figure>\n", svg(*sheet.drawing));
  if (!sheet.steps.empty()) out += "<h4>Tuning, in this order</h4>\n" + list_html(sheet.steps, true);
  if (!sheet.notes.empty()) out += "<h4>Notes</h4>\n" + list_html(sheet.notes, false);
  return out + "</section>\n";
}

}  // namespace stillmass::report
