#include "report/page_blocks.hpp"

#include <algorithm>

#include <fmt/format.h>

#include "stillmass/report/plotly.hpp"
#include "stillmass/report/svg.hpp"

#include "report/markup.hpp"
#include "report/palette.hpp"

namespace stillmass::report {

namespace {

bool numeric_column(const Table& table, std::size_t column) {
  return std::all_of(table.rows.begin(), table.rows.end(), [&](const std::vector<std::string>& row) {
    return column >= row.size() || is_numeric_cell(row[column]);
  });
}

std::string table_html(const Table& table) {
  std::size_t columns = table.header.size();
  for (const auto& row : table.rows) columns = std::max(columns, row.size());
  std::vector<const char*> alignment;
  for (std::size_t i = 0; i < columns; ++i) alignment.push_back(numeric_column(table, i) ? " class=\"number\"" : "");

  std::string out = fmt::format("<div class=\"wide\" tabindex=\"0\" role=\"region\" aria-label=\"{}\">\n<table>\n",
                                escaped(table.caption.empty() ? "Table" : table.caption));
  if (!table.caption.empty()) out += fmt::format("<caption>{}</caption>\n", escaped(table.caption));
  if (!table.header.empty()) {
    out += "<thead><tr>";
    for (std::size_t i = 0; i < table.header.size(); ++i) {
      out += fmt::format("<th scope=\"col\"{}>{}</th>", alignment[i], escaped(table.header[i]));
    }
    out += "</tr></thead>\n";
  }
  out += "<tbody>\n";
  for (const auto& row : table.rows) {
    out += "<tr>";
    for (std::size_t i = 0; i < columns; ++i) {
      out += fmt::format("<td{}>{}</td>", alignment[i], i < row.size() ? escaped(row[i]) : "");
    }
    out += "</tr>\n";
  }
  out += "</tbody>\n</table>\n</div>\n";
  for (const std::string& note : table.notes) out += fmt::format("<p class=\"note\">{}</p>\n", escaped(note));
  return out;
}

std::string chart_html(const Chart& chart) {
  std::string out = fmt::format("<figure class=\"chart\">\n<figcaption>{}</figcaption>\n", escaped(chart.title));
  out += fmt::format("<p class=\"unseen\">{}</p>\n", escaped(description_of(chart)));
  out += fmt::format("<div class=\"screen\" role=\"group\" aria-label=\"{}\"></div>\n", escaped(chart.title));
  out += fmt::format("<div class=\"paper\">\n{}</div>\n", svg(chart));
  out += fmt::format("<script type=\"application/json\">{}</script>\n", plotly_json(chart));
  if (!chart.caption.empty()) out += fmt::format("<p class=\"note\">{}</p>\n", escaped(chart.caption));
  return out + "</figure>\n";
}

struct BlockHtml {
  std::string operator()(const Paragraph& paragraph) const {
    return fmt::format("<p>{}</p>\n", escaped(paragraph.text));
  }
  std::string operator()(const Bullets& bullets) const { return list_html(bullets.items, bullets.numbered); }
  std::string operator()(const Table& table) const { return table_html(table); }
  std::string operator()(const Chart& chart) const { return chart_html(chart); }
  std::string operator()(const SpecSheet& sheet) const { return html(sheet); }
  std::string operator()(const Caution& caution) const {
    std::string heading;
    if (!caution.heading.empty()) heading = fmt::format("<strong>{}</strong> ", escaped(caution.heading));
    return fmt::format("<p class=\"caution-box {}\">{}{}{}</p>\n", role_of(caution.tone), tone_sign(caution.tone),
                       heading, escaped(caution.text));
  }
  std::string operator()(const MachineSketch& sketch) const {
    return fmt::format("<figure class=\"drawing\">\n<figcaption>{}</figcaption>\n{}</figure>\n", escaped(sketch.title),
                       svg(sketch));
  }
  /// Open as long as no script has folded it, so that nothing is hidden with scripts off.
  std::string operator()(const Details& details) const {
    std::string out = fmt::format("<details open>\n<summary>{}</summary>\n", escaped(details.summary));
    for (const Block& block : details.blocks) out += block_html(block);
    return out + "</details>\n";
  }
};

}  // namespace

std::string block_html(const Block& block) {
  return std::visit(BlockHtml{}, static_cast<const Block::variant&>(block));
}

std::string_view tone_sign(Tone tone) {
  switch (tone) {
    case Tone::good:
      return "<span class=\"sign\" aria-hidden=\"true\">✓</span><span class=\"unseen\">In order: </span>";
    case Tone::caution:
      return "<span class=\"sign\" aria-hidden=\"true\">!</span><span class=\"unseen\">Caution: </span>";
    case Tone::bad:
      return "<span class=\"sign\" aria-hidden=\"true\">✕</span><span class=\"unseen\">Act: </span>";
    case Tone::neutral:
      break;
  }
  return "<span class=\"sign\" aria-hidden=\"true\">i</span>";
}

}  // namespace stillmass::report
