#pragma once

#include <string>
#include <vector>

namespace stillmass::absorber {

/// What a spring is made of.
struct Material {
  std::string name;
  double youngs_modulus = 0.0;  ///< Pa
  double shear_modulus = 0.0;   ///< Pa
  double density = 0.0;         ///< kg/m3
  double bending_endurance =
      0.0;                       ///< Pa, amplitude of a fully reversed bending stress borne for ever; 0: not for blades
  double shear_endurance = 0.0;  ///< Pa, amplitude of a shear stress borne for ever; 0: not for helical springs
};

/// Flat bar from which blades are cut; `material` names a row of the materials.
struct FlatBar {
  double width_m = 0.0;
  double thickness_m = 0.0;
  std::string material;
};

/// Wire or rod from which helical springs are wound.
struct Wire {
  double diameter_m = 0.0;
  std::string material;
};

/// What can be bought (data/tables/materials.toml and stock.toml).
struct Stock {
  std::vector<Material> materials;
  std::vector<FlatBar> bars;
  std::vector<Wire> wires;

  /// Throws `Error` (usage) for a name that no row has.
  const Material& material(const std::string& name) const;
};

}  // namespace stillmass::absorber
