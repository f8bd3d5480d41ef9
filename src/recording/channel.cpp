#include "stillmass/recording/channel.hpp"

namespace stillmass::recording {

std::string_view name(Role role) {
  switch (role) {
    case Role::vibration:
      return "vibration";
    case Role::force:
      return "force";
    case Role::tacho:
      return "tacho";
  }
  return "";
}

}  // namespace stillmass::recording
