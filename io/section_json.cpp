#include <numbers>

#include "io/json_text.h"
#include "io/writers.h"

namespace io {

std::string section_json(const engine::FieldMatrices& field, const Eigen::MatrixXcd& impedance,
                         double frequency, const std::vector<std::string>& names,
                         const std::string& reference, const std::vector<std::string>& materials) {
  nlohmann::ordered_json out;
  Numbers number;
  out["format"] = "idlewire-section-result/1";
  out["frequency_Hz"] = frequency;
  out["conductors"] = names;
  out["reference"] = reference;
  out["materials"] = materials;
  out["capacitance_F_per_m"] = number.matrix(field.capacitance, "the capacitance");
  out["conductance_S_per_m"] = number.matrix(
      Eigen::MatrixXd(2 * std::numbers::pi * frequency * field.loss_capacitance), "the conductance");
  out["external_inductance_H_per_m"] = number.matrix(field.external_inductance, "the external inductance");
  out["impedance_ohm_per_m"] = number.matrix(impedance, "the impedance");
  out["convergence"] = {{"order", field.order}, {"estimated_relative_error", field.estimated_relative_error}};
  out["warnings"] = number.warnings();
  return json_text(out);
}

}  // namespace io
