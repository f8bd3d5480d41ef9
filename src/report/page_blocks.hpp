#pragma once

#include <string>
#include <string_view>

#include "stillmass/report/page.hpp"

namespace stillmass::report {

std::string block_html(const Block& block);

/// A sign for the eye and a word for those who do not see it: tone is never told by colour alone.
std::string_view tone_sign(Tone tone);

}  // namespace stillmass::report
