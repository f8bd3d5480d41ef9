#include "stillmass/base/finding.hpp"

#include <array>

namespace stillmass::base {
namespace {

constexpr auto codes = std::to_array<CodeText>({
    {Code::clipped, "clipped", "samples stand at the end of the recorder's range",
     "the signal was larger than the range", "take it again with a larger range"},
    {Code::overload, "overload", "flat tops below the recorder's range",
     "an amplifier before the recorder, or the sensor, was overloaded",
     "take it again with less gain or a less sensitive sensor"},
    {Code::dropout, "dropout", "the signal drops to nothing for a while", "a loose cable or connector",
     "fix the cable with tape near the sensor and take it again"},
    {Code::flat_line, "flat-line", "the same value over a long time", "a dead sensor or a channel left open",
     "check the cable, the sensor's supply and the channel's setting"},
    {Code::missing_values, "missing-values", "cells without a number", "the logger lost samples",
     "take it again, or use the parts between"},
    {Code::not_a_number, "not-a-number", "samples that are not numbers", "a faulty export", "export it again"},
    {Code::gap, "gap", "the time jumps", "the logger paused or lost samples",
     "nothing is carried across a gap; record longer without pauses"},
    {Code::uneven_times, "uneven-times", "the time stamps are not evenly spaced",
     "the logger's clock jitters or it samples on demand",
     "trust only frequencies far below half the rate; use a logger with a steady clock"},
    {Code::odd_lines, "odd-lines", "lines of the file do not fit its table",
     "the logger was restarted, or the file was damaged or put together from several",
     "look at the lines named; export each recording to a file of its own"},
    {Code::truncated, "truncated", "the file ends before its header says so",
     "the recorder was switched off or the copy broke off", "copy the file again, or use what is there"},
    {Code::no_signal, "no-signal", "hardly any signal", "the sensor is not connected or the gain is far too small",
     "check the chain with a tap of the finger"},
    {Code::spikes, "spikes", "single samples far outside the rest", "electrical interference or a loose contact",
     "check cables and earthing, keep away from drives' cables"},
    {Code::drift, "drift", "the signal settles or drifts", "the sensor was still settling after mounting or power-up",
     "wait a minute after power-up and take it again"},
    {Code::low_frequency_slope, "low-frequency-slope", "the spectrum rises steeply towards zero",
     "a settling, overloaded or thermally disturbed sensor; integration to velocity enlarges it",
     "let the sensor settle, use a stud or a firm magnet, judge only above the slope"},
    {Code::mains_hum, "mains-hum", "lines at the mains frequency and its harmonics",
     "an earth loop or a cable beside power cables", "isolate the sensor's base or move the cable"},
    {Code::few_bits, "few-bits", "the signal uses only the last few steps of the recorder",
     "the range is far too large", "take it again with a smaller range"},
    {Code::near_noise_floor, "near-noise-floor", "the level is close to the noise of sensor and recorder",
     "a sensor too insensitive for this machine", "use a more sensitive sensor or a smaller range"},
    {Code::aliasing_suspected, "aliasing-suspected", "the spectrum does not fall off towards half the sampling rate",
     "a recorder without an anti-alias filter", "record at a higher rate or with a filter"},
    {Code::identical_channels, "identical-channels", "two channels carry the same samples",
     "one sensor on two inputs, or a mixed-up cable", "tap each sensor and look which channel answers"},
    {Code::unit_suspected, "unit-suspected", "the level is not believable in the stated unit",
     "a wrong unit or sensitivity (a factor of 9.81, 25.4 or 1000)", "check unit and sensitivity of the channel"},
    {Code::channels_swapped, "channels-swapped", "pulses stand where vibration is expected",
     "the cables of tacho and sensor are exchanged, or the channels are named the wrong way round",
     "turn the shaft by hand or tap the sensor and look which channel answers"},
    {Code::mounting_resonance, "mounting-resonance", "a single high hump, and hardly anything above it",
     "the sensor rings on its mounting: held by hand, on a weak magnet, on paint or dirt",
     "clean the spot, use a stud or wax, and judge only below 0.3 of the hump's frequency"},
    {Code::calibration_off, "calibration-off", "the calibration recording does not show the level stated",
     "a wrong unit, scale or sensitivity, a peak value taken for r.m.s., or a dead sensor",
     "mend what is stated of the channel, or record the calibrator again"},
    {Code::double_hit, "double-hit", "the hammer struck twice", "a bounce", "strike again, with a short free swing"},
    {Code::weak_hit, "weak-hit", "the blow was much weaker than the others", "a glancing blow", "strike again"},
    {Code::too_few_lines, "too-few-lines", "too few spectral lines within the resonance peak",
     "the blocks are too short for this damping", "record longer after each blow, or longer altogether"},
    {Code::short_decay, "short-decay", "the ring-down was cut before it died away",
     "the next blow came too early or the recording ended", "wait until it is quiet between blows"},
    {Code::low_coherence, "low-coherence", "response and force do not belong together at this frequency",
     "noise, a machine running nearby, or a non-linear support", "more blows, a heavier hammer, a quieter moment"},
    {Code::sweep_too_fast, "sweep-too-fast", "the speed passed the resonance too fast for it to build up",
     "a fast run-up or coast-down", "damping is not read from this; make a hammer test or a slower run"},
    {Code::missing_pulses, "missing-pulses", "tacho pulses are missing", "a dirty mark or a wrong distance",
     "clean the mark, set the probe's distance"},
    {Code::extra_pulses, "extra-pulses", "more tacho pulses than turns", "reflections or a doubled mark",
     "cover shiny parts, use one mark"},
    {Code::no_pulses, "no-pulses", "the tacho gives no regular pulses",
     "no mark, a probe too far away, its supply switched off, or another signal on its channel",
     "look at the probe's lamp while the shaft turns, clean the mark, check the channel"},
    {Code::unit_assumed, "unit-assumed", "nothing says the channel's unit", "the file holds plain numbers",
     "give it: --channel INDEX=NAME:UNIT*SCALE or in the survey file"},
    {Code::calibration_assumed, "calibration-assumed", "nothing says how well the sensors are calibrated",
     "no calibration recording", "record a handheld calibrator, or a hung known mass struck by the hammer"},
    {Code::stopped_shift_assumed, "stopped-shift-assumed", "the mode was measured on the stopped machine",
     "bearings, liquid and temperature move it when running",
     "a running measurement (run-up, or a trial absorber) replaces the assumption"},
    {Code::methods_disagree, "methods-disagree", "two methods give different answers",
     "a close mode, noise or a non-linear support", "look at the fit; make a test with finer lines"},
    {Code::outside_model, "outside-model", "vibration that the absorber does not touch",
     "other lines, directions or modes", "see what remains; treat its own cause"},
    {Code::limit_unknown, "limit-unknown", "no limit could be applied", "the survey file does not say enough",
     "state the standard, the foundation and where the point sits"},
    {Code::target_not_met, "target-not-met", "the predicted vibration stays above the target",
     "the allowed mass is too small or the mode too uncertain",
     "allow more mass, measure again, or choose another remedy"},
    {Code::close_modes, "close-modes", "another mode stands close by", "a nearly symmetric support",
     "test both directions; the absorber must be tuned against both"},
    {Code::speed_on_split, "speed-on-split", "a speed of the machine falls on a new resonance",
     "the absorber splits one natural frequency into two", "choose another mass ratio or keep away from that speed"},
    {Code::unbalance, "unbalance", "the line at running speed dominates", "unbalance of the rotor",
     "balance it in place if the force, not a resonance, is to blame"},
    {Code::resonance, "resonance", "a forcing frequency stands close to a natural frequency",
     "the structure enlarges an ordinary force", "move the natural frequency, add damping, or fit an absorber"},
    {Code::vane_pass_force, "vane-pass-force", "a strong line at vane pass",
     "flow at the wrong point, clearance at the cutwater", "check flow against the best point, then the clearance"},
    {Code::electrical_force, "electrical-force", "a strong line at twice the line frequency",
     "an uneven air gap or a soft foot", "check for soft foot; see whether it vanishes when the supply is cut"},
    {Code::misalignment, "misalignment", "twice the running speed, or axial motion at running speed, at a coupling",
     "shafts that do not line up at the coupling, warm and under load",
     "compare phases across the coupling, then check the alignment warm, stopped and locked out"},
    {Code::looseness, "looseness", "many multiples of the running speed, or halves of it",
     "a loose bolt, a worn fit or a cracked foot", "compare the motion of foot, frame and base at each joint"},
    {Code::bent_shaft, "bent-shaft", "axial motion at running speed, opposite at the two ends of one rotor",
     "a bent shaft, or a coupling or bearing seated askew",
     "measure the run-out while it is turned by hand, under the site's lock-out"},
    {Code::bearing_damage, "bearing-damage", "shocks in the rhythm of a rolling-element bearing",
     "a flaw on a ring, an element or the cage", "measure it again soon and follow the trend; plan the change"},
    {Code::cavitation_like, "cavitation-like", "broad-band noise in short bursts",
     "cavitation or recirculation in the pump", "compare suction pressure and flow with the pump's curve"},
    {Code::soft_foot, "soft-foot", "motion at running speed along one direction, with an electrical line",
     "a foot that does not rest flat, or a frame under strain", "measure the motion of each foot"},
    {Code::speed_varies, "speed-varies", "the speed changes within the recording",
     "a run-up, a drive that follows its process, or a load that sways",
     "use the steady part (--from, --to), or record a tacho and use runup"},
    {Code::single_shocks, "single-shocks", "single shocks make the signal",
     "a hammer test, or a sensor that was touched", "use bump for blows; record the running machine for its spectrum"},
});

static_assert(codes.size() == static_cast<std::size_t>(Code::single_shocks) + 1);

}  // namespace

std::span<const CodeText> all_codes() { return codes; }

const CodeText& text(Code code) { return codes[static_cast<std::size_t>(code)]; }

std::string_view name(Strength strength) {
  switch (strength) {
    case Strength::weak:
      return "weak";
    case Strength::fair:
      return "fair";
    case Strength::strong:
      return "strong";
  }
  return "";
}

}  // namespace stillmass::base
