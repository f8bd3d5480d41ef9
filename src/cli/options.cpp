#include "cli/options.hpp"

#include <algorithm>
#include <array>
#include <cmath>

#include "stillmass/base/number.hpp"
#include "stillmass/base/text.hpp"

#include "cli/values.hpp"

namespace stillmass::cli {
namespace {

constexpr std::string_view recordings = "check spectrum runup bump";
constexpr std::string_view results = "check spectrum runup bump absorber survey";
constexpr std::string_view pages = "check spectrum runup bump absorber";
constexpr std::string_view every = "check spectrum runup bump absorber survey simulate";

constexpr auto options = std::to_array<Option>({
    {"--survey", "FILE", Rule::file, false, "take channels, machine and limits from this survey file", recordings},
    {"--channel", "INDEX=NAME[:UNIT[*SCALE]]", Rule::channel, true,
     "name, unit and scale of a channel; INDEX from 1, a time column not counted; UNIT one of g, m/s2, mm/s, m/s, "
     "in/s, um, "
     "mm, m, mil, N, lbf, V, 1, tacho; SCALE in units per 1.0 of the stored sample (full scale of an integer file)",
     recordings},
    {"--rate", "HZ", Rule::positive, false, "sampling rate of a text file without a time column", recordings},
    {"--separator", "comma|semicolon|tab|blanks", Rule::choice, false,
     "what stands between the columns of a text file (default: recognised)", recordings},
    {"--decimal", "point|comma", Rule::choice, false, "decimal sign of a text file (default: recognised)", recordings},
    {"--time-column", "N", Rule::column, false,
     "column of a text file that holds the times, every column counted from 1; 0: none (default: recognised)",
     recordings},
    {"--time-unit", "s|ms|us|ns|min|h|d", Rule::choice, false,
     "unit of the times of a text file (default: from the column's name)", recordings},
    {"--dates", "day-first|month-first", Rule::choice, false, "order in dates such as 03/04/2024", recordings},
    {"--from", "S", Rule::not_negative, false, "use the recording from this time", recordings},
    {"--to", "S", Rule::positive, false, "use the recording to this time", recordings},
    {"--json", "FILE", Rule::file, false, "write the result as JSON (- for standard output)", results},
    {"--csv", "DIR", Rule::folder, false, "write the curves as CSV files into this folder", pages},
    {"--html", "FILE", Rule::file, false, "write the report as one HTML file", pages},
    {"--out", "DIR", Rule::folder, false, "output folder (survey: the survey file's name with -report; simulate: .)",
     "survey simulate"},
    {"--quiet", "", Rule::flag, false, "no text, only warnings and errors", every},
    {"--threads", "N", Rule::whole_number, false, "threads to use (default: all); the results are the same", every},

    {"--quantity", "acceleration|velocity|displacement", Rule::choice, false,
     "quantity of levels and peaks (default: velocity where the channel allows it)", "spectrum"},
    {"--detector", "rms|peak|peak-to-peak", Rule::choice, false, "how amplitudes are stated (default: rms)",
     "spectrum"},
    {"--band", "LO:HI", Rule::range, false, "band in Hz: of the overall level (spectrum), of the modes (bump)",
     "spectrum bump"},
    {"--window", "hann|hamming|blackman-harris|flat-top|rectangle", Rule::choice, false, "window (default: hann)",
     "spectrum"},
    {"--overlap", "FRACTION", Rule::fraction, false, "of the blocks (default: 0.5)", "spectrum"},
    {"--resolution", "HZ", Rule::positive, false,
     "spacing of the lines (default: chosen from length and speed, and said)", "spectrum"},
    {"--lines", "N", Rule::whole_number, false, "so many lines up to --max-frequency or half the rate, instead",
     "spectrum"},
    {"--average", "mean|peak-hold|exponential|synchronous", Rule::choice, false,
     "how blocks are put together (default: mean, of the squares); synchronous: over turns of the tacho, beside the "
     "mean",
     "spectrum"},
    {"--averages", "N", Rule::whole_number, false, "what an exponential average is worth (default: 16)", "spectrum"},
    {"--density", "", Rule::flag, false, "show spectral densities instead of amplitudes", "spectrum"},
    {"--third-octaves", "", Rule::flag, false, "show the levels of the third-octave bands", "spectrum"},
    {"--zoom", "LO:HI", Rule::range, false, "a band in Hz with the finest lines that the recording allows", "spectrum"},
    {"--envelope", "auto|LO:HI", Rule::auto_or_range, false,
     "envelope spectrum for rolling bearings, of the most impulsive band or of this one in Hz (default: auto where the "
     "survey names bearings)",
     "spectrum"},
    {"--background", "FILE", Rule::file, false,
     "recording of the stopped machine with its neighbours running (default: that of the survey)", "spectrum"},
    {"--reference", "NAME", Rule::text, false,
     "point or channel to which the others are compared at each forcing frequency (default: chosen)", "spectrum"},
    {"--max-frequency", "HZ", Rule::positive, false, "highest frequency shown and searched", "spectrum runup bump"},
    {"--peaks", "N", Rule::whole_number, false, "how many peaks are listed (default: 12)", "spectrum"},

    {"--pulses-per-turn", "N", Rule::whole_number, false, "pulses of the tacho in one turn (default: 1)",
     "runup spectrum"},
    {"--orders", "LIST", Rule::number_list, false, "orders to follow (default: 1,2,3)", "runup"},
    {"--speed-channel", "NAME", Rule::text, false, "channel of the tacho (default: the one with unit tacho)", "runup"},

    {"--driving-point", "NAME", Rule::text, false,
     "channel of the response where the hammer strikes (default: the point that the force names, else the first)",
     "bump"},
    {"--added-mass", "KG=FILE", Rule::added_mass, true,
     "the same test with this mass bolted on at the driving point; again for more masses", "bump"},

    {"--result", "RESULT.json", Rule::file, false, "take the mode from a saved result", "absorber"},
    {"--mode", "N", Rule::whole_number, false, "which mode of the result, from 1", "absorber"},
    {"--mode-frequency", "HZ", Rule::positive_estimate, false, "natural frequency, V or V+-U", "absorber"},
    {"--mode-damping", "RATIO", Rule::positive_estimate, false, "damping ratio, V or V+-U", "absorber"},
    {"--mode-mass", "KG", Rule::positive_estimate, false, "modal mass at the attachment point, V or V+-U", "absorber"},
    {"--forcing", "constant|unbalance|base|random", Rule::choice, false,
     "how the force goes with frequency (default: unbalance with --speed, else constant)", "absorber"},
    {"--forcing-frequency", "HZ|LO:HI", Rule::value_or_range, false, "forcing frequency or range", "absorber"},
    {"--speed", "RPM|LO:HI", Rule::value_or_range, false,
     "rotational speed or range: as forcing frequency (absorber), near which it is looked for (spectrum)",
     "absorber spectrum"},
    {"--duty-frequency", "HZ", Rule::positive, false,
     "frequency at which --before was measured (default: the middle of the range)", "absorber"},
    {"--before", "MM_S", Rule::positive, false, "r.m.s. velocity of the forcing line now", "absorber"},
    {"--target", "MM_S", Rule::positive, false, "r.m.s. velocity to reach", "absorber"},
    {"--max-mass", "KG", Rule::positive, false, "heaviest absorber allowed", "absorber"},
    {"--max-travel", "MM", Rule::positive, false, "room for its motion, either way", "absorber"},
    {"--temperature", "LO:HI", Rule::signed_range, false, "lowest and highest on site, degrees Celsius", "absorber"},
    {"--objective", "velocity|displacement", Rule::choice, false,
     "what is made least (default: velocity; displacement serves to check textbook values)", "absorber"},

    {"--truth", "FILE", Rule::file, false, "write the skid's exact answers as TOML", "simulate"},
});

constexpr auto commands = std::to_array<Command>({
    {"check", "RECORDING...", 1, 1000, "what is in a recording, and is it good?", ""},
    {"spectrum", "RECORDING", 1, 1, "averaged spectra, levels, peaks, their causes, severity", ""},
    {"runup", "RECORDING", 1, 1, "speed, order tracks and critical speeds of a run-up or coast-down",
     "Do not dwell on a resonance; keep to the motor's starts per hour and the site's rules."},
    {"bump", "RECORDING...", 1, 1000,
     "frequency responses of a hammer test, or ring-downs: natural frequencies, damping, modal mass",
     "Strike only a machine that is stopped, isolated and locked out by the site's rules; never near a running shaft."},
    {"absorber", "", 0, 0, "from a mode and its forcing to the specification of an absorber",
     "An absorber is a suspended mass that can break loose: secondary retention, a guard and a fatigue check by a "
     "licensed engineer are part of it."},
    {"survey", "SURVEY.toml", 1, 1, "the main job: all of the above for one visit, and the report", ""},
    {"simulate", "SKID.toml", 1, 1, "recordings of a virtual skid", ""},
    {"manual", "page|completion|keys", 1, 1, "", ""},  // hidden: for packagers and README
});

bool all_numbers(std::string_view text) {
  const auto parts = base::split(text, ',');
  return std::all_of(parts.begin(), parts.end(), [](std::string_view part) {
    const auto number = base::parse_number(part);
    return number && *number > 0.0;
  });
}

bool among(std::string_view words, std::string_view text) {
  const auto parts = base::split(words, '|');
  return std::find(parts.begin(), parts.end(), text) != parts.end();
}

}  // namespace

std::span<const Option> all_options() { return options; }
std::span<const Command> all_commands() { return commands; }

bool belongs(const Option& option, std::string_view command) {
  const auto words = base::split(option.commands, ' ');
  return std::find(words.begin(), words.end(), command) != words.end();
}

std::string broken_rule(const Option& option, std::string_view text) {
  const auto number = base::parse_number(text);
  const auto range = parse_range(text);
  const auto ok = [&](bool kept, const char* must) { return kept ? std::string() : std::string("must be ") + must; };
  switch (option.rule) {
    case Rule::flag:
      return {};
    case Rule::text:
    case Rule::file:
    case Rule::folder:
      return ok(!text.empty(), "a name");
    case Rule::choice:
      return ok(among(option.argument, text), ("one of " + std::string(option.argument)).c_str());
    case Rule::whole_number: {
      const auto whole = base::parse_integer(text);
      return ok(whole && *whole >= 1 && *whole <= 1'000'000, "a whole number from 1");
    }
    case Rule::column: {
      const auto column = base::parse_integer(text);
      return ok(column && *column >= 0 && *column <= 100'000, "a column's number from 1, or 0 for none");
    }
    case Rule::number:
      return ok(number.has_value(), "a number");
    case Rule::positive:
      return ok(number && *number > 0.0, "a number above 0");
    case Rule::not_negative:
      return ok(number && *number >= 0.0, "a number from 0");
    case Rule::fraction:
      return ok(number && *number >= 0.0 && *number <= 0.95, "a number from 0 to 0.95");
    case Rule::positive_estimate: {
      const auto estimate = parse_estimate(text);
      return ok(estimate && estimate->value > 0.0, "a number above 0, with its standard uncertainty as in 25.3+-0.05");
    }
    case Rule::range:
      return ok(range && range->lo >= 0.0, "a range LO:HI");
    case Rule::signed_range:
      return ok(range.has_value(), "a range LO:HI");
    case Rule::value_or_range:
      return ok((number && *number > 0.0) || (range && range->lo > 0.0), "a number above 0 or a range LO:HI");
    case Rule::number_list:
      return ok(all_numbers(text), "numbers above 0 with commas between");
    case Rule::channel:
      return broken_channel(text);
    case Rule::added_mass:
      return ok(parse_added_mass(text).has_value(), "KG=FILE with KG above 0");
    case Rule::auto_or_range:
      return ok(text == "auto" || (range && range->lo > 0.0), "auto or a range LO:HI");
  }
  return {};
}

}  // namespace stillmass::cli
