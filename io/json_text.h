// JSON as this program writes it.
#pragma once

#include <Eigen/Core>
#include <complex>
#include <nlohmann/json.hpp>
#include <string>
#include <vector>

namespace io {

/// The value as JSON text with a newline at the end. Floating-point numbers are the shortest text that
/// reads back to the same double and always hold a point or an exponent, so that a reader takes them
/// as such; NaN and infinity are null. Text that is not UTF-8 has its bad bytes replaced. What fits in
/// 100 columns stays on one line, and so do rows of numbers and small objects that hold no others.
std::string json_text(const nlohmann::ordered_json& value);

/// Numbers on their way out. One that is not finite becomes null and leaves a warning that says which.
class Numbers {
 public:
  nlohmann::ordered_json real(double value, const std::string& what);
  nlohmann::ordered_json complex(std::complex<double> value, const std::string& what);  // [re, im]

  /// {key: magnitude, "angle_deg": angle}, both null where the value is not finite.
  nlohmann::ordered_json phasor(std::complex<double> value, const char* key, const std::string& what);

  nlohmann::ordered_json matrix(const Eigen::MatrixXd& m, const std::string& what);   // rows
  nlohmann::ordered_json matrix(const Eigen::MatrixXcd& m, const std::string& what);  // {"re", "im"}

  const std::vector<std::string>& warnings() const { return warnings_; }

 private:
  nlohmann::ordered_json missing(const std::string& what);

  std::vector<std::string> warnings_;
};

}  // namespace io
