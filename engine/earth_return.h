// The earth as a return path at power frequency.
#pragma once

namespace engine {

/// What the earth adds to every self and mutual series impedance of conductors above it, after the
/// leading terms of Carson's series (1926): `resistance` + j w mu_0 / (2 pi) ln(`depth` / distance),
/// the distance that between two conductors, or a conductor's geometric mean radius. Holds while heights
/// and distances are small beside the depth, as in any building; the next term is of relative size
/// height / depth.
struct EarthReturn {
  double resistance = 0.0;  // ohm/m, w mu_0 / 8, about pi^2 f 1e-7
  double depth = 0.0;       // m, the equivalent depth of return, about 658.9 sqrt(resistivity / f)
};

/// `frequency` in Hz and `resistivity` in ohm m; throws std::invalid_argument unless both are positive
/// and finite.
EarthReturn earth_return(double frequency, double resistivity);

}  // namespace engine
