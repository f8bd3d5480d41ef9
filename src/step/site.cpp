#include "stillmass/step/site.hpp"

#include <algorithm>

namespace stillmass::step {

const SitePoint* Site::point(std::string_view wanted) const {
  const auto at =
      std::find_if(points.begin(), points.end(), [&](const SitePoint& each) { return each.name == wanted; });
  return at == points.end() ? nullptr : &*at;
}

}  // namespace stillmass::step
