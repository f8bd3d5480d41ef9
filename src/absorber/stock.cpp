#include "stillmass/absorber/stock.hpp"

#include "stillmass/base/error.hpp"

namespace stillmass::absorber {

const Material& Stock::material(const std::string& name) const {
  for (const Material& candidate : materials) {
    if (candidate.name == name) return candidate;
  }
  throw base::usage_error("stock", "names the material " + name + ", which no row describes");
}

}  // namespace stillmass::absorber
