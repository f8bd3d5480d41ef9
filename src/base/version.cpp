#include "stillmass/base/version.hpp"

namespace stillmass::base {

std::string_view version() { return STILLMASS_VERSION; }

}  // namespace stillmass::base
