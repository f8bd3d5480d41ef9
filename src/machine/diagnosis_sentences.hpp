#pragma once

#include <string>
#include <string_view>

#include "machine/diagnosis_measures.hpp"

namespace stillmass::machine {

// The first placeholder of a table's sentence that is not of the closed list ({line}, {value}, {percent}, {where},
// {channel}, {limit}, {bearing}, {mode}); empty where all are.
std::string_view unknown_placeholder(std::string_view sentence);

// The sentence with its placeholders filled from the observation.
std::string evidence(std::string_view sentence, const Observed& observed, const Observation& observation,
                     const Question& question);

// The finding's own sentence, filled from the question: {line} with its share, {channel}, {bearing}, {mode}.
std::string headline(std::string_view sentence, const Question& question);

}  // namespace stillmass::machine
