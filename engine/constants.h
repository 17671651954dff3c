// Constants of nature, CODATA 2018.
#pragma once

namespace engine {
inline constexpr double k_epsilon_0 = 8.8541878128e-12;  // F/m
inline constexpr double k_mu_0 = 1.25663706212e-6;       // H/m
}  // namespace engine
