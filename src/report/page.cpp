#include "stillmass/report/page.hpp"

#include <algorithm>

#include <fmt/format.h>

#include "report/asset.hpp"
#include "report/markup.hpp"
#include "report/page_blocks.hpp"
#include "report/palette.hpp"

namespace stillmass::report {

namespace {

std::string facts_html(const Page& page) {
  if (page.facts.empty()) return {};
  std::string out = "<dl class=\"facts\">\n";
  for (const auto& fact : page.facts) {
    out += fmt::format("<div><dt>{}</dt><dd>{}</dd></div>\n", escaped(fact.first), escaped(fact.second));
  }
  return out + "</dl>\n";
}

std::string verdict_html(const Page& page) {
  if (page.verdict.empty() && page.lines.empty()) return {};
  std::string out = fmt::format("<section class=\"verdict {}\" aria-label=\"Verdict\">\n", role_of(page.tone));
  if (!page.verdict.empty())
    out += fmt::format("<p class=\"answer\">{}{}</p>\n", tone_sign(page.tone), escaped(page.verdict));
  if (!page.lines.empty()) out += "<dl>\n";
  for (const Line& line : page.lines) {
    out += fmt::format("<div class=\"{}\"><dt>{}</dt><dd>{}{}</dd></div>\n", role_of(line.tone), escaped(line.label),
                       line.tone == Tone::neutral ? "" : tone_sign(line.tone), escaped(line.text));
  }
  if (!page.lines.empty()) out += "</dl>\n";
  return out + "</section>\n";
}

std::string contents_html(const Page& page) {
  if (page.sections.size() < 2) return {};
  std::string out = "<nav aria-label=\"Contents\"><ol>\n";
  for (std::size_t i = 0; i < page.sections.size(); ++i) {
    out += fmt::format("<li><a href=\"#section-{}\">{}</a></li>\n", i + 1, escaped(page.sections[i].heading));
  }
  return out + "</ol></nav>\n";
}

std::string sections_html(const Page& page) {
  std::string out;
  for (std::size_t i = 0; i < page.sections.size(); ++i) {
    out += fmt::format("<section id=\"section-{}\">\n<h2>{}</h2>\n", i + 1, escaped(page.sections[i].heading));
    for (const Block& block : page.sections[i].blocks) out += block_html(block);
    out += "</section>\n";
  }
  return out;
}

bool any_chart(const std::vector<Block>& blocks) {
  return std::any_of(blocks.begin(), blocks.end(), [](const Block& block) {
    const auto* details = std::get_if<Details>(&block);
    return std::holds_alternative<Chart>(block) || (details != nullptr && any_chart(details->blocks));
  });
}

}  // namespace

std::string html(const Page& page) {
  std::vector<std::string_view> scripts;
  const bool charts = std::any_of(page.sections.begin(), page.sections.end(),
                                  [](const Section& section) { return any_chart(section.blocks); });
  if (charts) scripts.push_back(asset("plotly.js"));
  scripts.push_back(asset("page.js"));

  std::string out = fmt::format(
      "<!DOCTYPE html>\n<html lang=\"en\">\n<head>\n<meta charset=\"utf-8\">\n"
      "<meta http-equiv=\"Content-Security-Policy\" content=\"{}\">\n"
      "<meta name=\"viewport\" content=\"width=device-width, "
      "initial-scale=1\">\n<title>{}</title>\n<style>\n{}{}</style>\n",
      content_policy(scripts), escaped(page.title), palette_css(), asset("page.css"));
  out += "</head>\n<body>\n<main>\n<header>\n";
  if (!page.subtitle.empty()) out += fmt::format("<p class=\"kind\">{}</p>\n", escaped(page.subtitle));
  out += fmt::format("<h1>{}</h1>\n", escaped(page.title));
  out += facts_html(page) + "</header>\n";
  out += verdict_html(page) + contents_html(page) + sections_html(page) + "</main>\n";
  for (const std::string_view script : scripts) out += fmt::format("<script>{}</script>\n", script);
  return out + "</body>\n</html>\n";
}

}  // namespace stillmass::report
