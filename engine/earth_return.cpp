#include "engine/earth_return.h"

#include <cmath>
#include <numbers>
#include <stdexcept>
#include <string>

#include "engine/constants.h"

namespace engine {

EarthReturn earth_return(double frequency, double resistivity) {
  if (!(frequency > 0.0 && std::isfinite(frequency))) {
    throw std::invalid_argument("an earth return needs a positive frequency, not " +
                                std::to_string(frequency) + " Hz");
  }
  if (!(resistivity > 0.0 && std::isfinite(resistivity))) {
    throw std::invalid_argument("an earth return needs a positive resistivity, not " +
                                std::to_string(resistivity) + " ohm m");
  }
  const double omega_mu = 2.0 * std::numbers::pi * frequency * k_mu_0;  // ohm/m
  // Carson's P = pi/8 and Q = 1/4 - egamma/2 + ln(2/k)/2, k = distance * sqrt(omega_mu / resistivity).
  return {.resistance = omega_mu / 8.0,
          .depth = 2.0 * std::exp(0.5 - std::numbers::egamma) * std::sqrt(resistivity / omega_mu)};
}

}  // namespace engine
