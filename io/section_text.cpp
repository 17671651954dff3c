#include <fmt/format.h>

#include <numbers>

#include "io/text_layout.h"
#include "io/writers.h"

namespace io {
namespace {

constexpr int k_width = 100;  // columns
constexpr int k_cell = 12;    // columns of one number, "-1.2345e-05" and a blank
constexpr int k_per_block = (k_width - 6) / k_cell;

/// A matrix with numbered rows and columns, as many columns side by side as fit.
std::string matrix_text(const std::string& title, const Eigen::MatrixXd& m) {
  std::string out = "\n" + title + "\n";
  for (Eigen::Index first = 0; first < m.cols(); first += k_per_block) {
    const Eigen::Index end = std::min<Eigen::Index>(m.cols(), first + k_per_block);
    out += "      ";
    for (Eigen::Index j = first; j < end; ++j) out += fmt::format("{:>{}}", j + 1, k_cell);
    out += "\n";
    for (Eigen::Index i = 0; i < m.rows(); ++i) {
      out += fmt::format("{:>6}", i + 1);
      for (Eigen::Index j = first; j < end; ++j) out += fmt::format("{:>{}.5g}", m(i, j), k_cell);
      out += "\n";
    }
  }
  return out;
}

}  // namespace

std::string section_text(const engine::FieldMatrices& field, const Eigen::MatrixXcd& impedance,
                         double frequency, const std::vector<std::string>& names,
                         const std::string& reference, const std::vector<std::string>& materials) {
  std::string out = fmt::format("Section at {:g} Hz, counted from {}\n\n", frequency, printable(reference));
  out += paragraph("CAUTION  ", netlists::caution(), k_width) + "\n";
  for (std::size_t k = 0; k < names.size(); ++k)
    out += paragraph(fmt::format("{:>6}  ", k + 1), printable(names[k]), k_width);
  const Eigen::MatrixXd conductance = 2 * std::numbers::pi * frequency * field.loss_capacitance;
  out += matrix_text("Capacitance, pF/m (Maxwell form)", 1e12 * field.capacitance);
  out += matrix_text("Conductance, nS/m (Maxwell form)", 1e9 * conductance);
  out += matrix_text("External inductance, uH/m", 1e6 * field.external_inductance);
  out += matrix_text("Series resistance, mohm/m", 1e3 * impedance.real());
  out += matrix_text("Series reactance, mohm/m", 1e3 * impedance.imag());
  out += fmt::format("\nHarmonics: {}. Estimated relative error of the capacitance: {:.1e}\n", field.order,
                     field.estimated_relative_error);
  if (!materials.empty()) out += "\nMaterials as taken\n";
  for (const std::string& material : materials) out += paragraph("  ", printable(material), k_width);
  return out;
}

}  // namespace io
