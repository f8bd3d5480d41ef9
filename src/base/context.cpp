#include "stillmass/base/context.hpp"

#include "stillmass/base/error.hpp"

namespace stillmass::base {

void Context::check_stop() const {
  if (stop.stop_requested()) throw Stopped();
}

}  // namespace stillmass::base
