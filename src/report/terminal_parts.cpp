#include "report/terminal_parts.hpp"

#include <fmt/format.h>

#include "stillmass/base/number.hpp"
#include "stillmass/base/text.hpp"
#include "stillmass/report/sentences.hpp"
#include "stillmass/report/terminal.hpp"

namespace stillmass::report {

namespace {

std::string headline(const base::Finding& each) {
  return bullet(base::printable((each.channel.empty() ? "" : each.channel + ": ") + cause_sentence(each)));
}

}  // namespace

std::string heading(const recording::Recording& recording) {
  return fmt::format("{}\n  {}; {} channel{}, {} Hz, {} s{}\n", base::printable(recording.file.string()),
                     base::printable(recording.format), recording.channels.size(),
                     recording.channels.size() == 1 ? "" : "s", base::plain(recording.rate_hz),
                     base::plain(recording.duration_s(), 4),
                     recording.segments.size() > 1 ? fmt::format(" in {} parts", recording.segments.size()) : "");
}

std::string bullet(const std::string& text) { return "  - " + wrapped(text, screen - 4, 4) + "\n"; }

std::string finding_lines(const std::vector<base::Finding>& findings, bool with_cause) {
  std::string out;
  const Shortened few = shortened(findings);
  for (const base::Finding& each : few.findings) {
    const base::CodeText& code = base::text(each.code);
    const std::string whose = each.channel.empty() ? "" : each.channel + ": ";
    const std::string cause = with_cause ? "likely " + std::string(code.likely_cause) + "; " : "";
    const std::string seen = each.text.empty() ? std::string(code.seen) : each.text;
    out += bullet(
        base::printable(fmt::format("{}{}{} [{}]; {}{}", whose, seen, when(each), code.name, cause, code.next_step)));
  }
  for (const std::string& more : few.more) out += bullet("and " + more);
  return out;
}

std::string cause_headlines(const std::vector<base::Finding>& findings) {
  std::string out;
  for (const base::Finding& each : findings) out += headline(each);
  return out;
}

std::string cause_lines(const std::vector<base::Finding>& findings) {
  std::string out;
  for (const base::Finding& each : findings) {
    const auto add = [&](const char* label, const std::vector<std::string>& texts) {
      for (const std::string& text : texts) {
        if (text == each.text) continue;  // the finding's sentence said it
        out += "      " + wrapped(base::printable(label + text), screen - 8, 8) + "\n";
      }
    };
    out += headline(each);
    add("seen: ", each.evidence);
    add("would confirm: ", each.confirm);
    add("would refute: ", each.refute);
  }
  return out;
}

}  // namespace stillmass::report
