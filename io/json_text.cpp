#include "io/json_text.h"

#include <algorithm>
#include <array>
#include <charconv>
#include <cmath>
#include <numbers>

namespace io {
namespace {
using nlohmann::ordered_json;

constexpr std::size_t k_width = 100;   // columns
constexpr std::size_t k_record = 300;  // columns, of an object that holds no other

// The library's own dump uses a method that is not always the shortest; std::to_chars is, by standard.
std::string number_text(double value) {
  if (!std::isfinite(value)) return "null";
  std::array<char, 32> buffer{};
  const auto end = std::to_chars(buffer.data(), buffer.data() + buffer.size(), value).ptr;
  std::string text(buffer.data(), end);
  if (text.find_first_of(".e") == std::string::npos) text += ".0";
  return text;
}

std::string scalar_text(const ordered_json& value) {
  if (value.is_number_float()) return number_text(value.get<double>());
  return value.dump(-1, ' ', false, ordered_json::error_handler_t::replace);
}

std::string key_text(const std::string& key) { return scalar_text(ordered_json(key)) + ": "; }

std::string on_one_line(const ordered_json& value) {
  if (!value.is_structured()) return scalar_text(value);
  std::string text;
  for (auto it = value.begin(); it != value.end(); ++it) {
    if (!text.empty()) text += ", ";
    text += (value.is_object() ? key_text(it.key()) : "") + on_one_line(*it);
  }
  return value.is_object() ? "{" + text + "}" : "[" + text + "]";
}

bool is_row(const ordered_json& value) {
  return value.is_array() && std::all_of(value.begin(), value.end(),
                                         [](const ordered_json& v) { return v.is_number() || v.is_null(); });
}

bool is_record(const ordered_json& value) {
  return value.is_object() &&
         std::none_of(value.begin(), value.end(), [](const ordered_json& v) { return v.is_structured(); });
}

void append(const ordered_json& value, std::size_t indent, std::size_t used, std::string& out) {
  if (!value.is_structured() || value.empty() || is_row(value)) {
    out += on_one_line(value);
    return;
  }
  const std::string line = on_one_line(value);
  if (used + line.size() <= (is_record(value) ? k_record : k_width)) {
    out += line;
    return;
  }
  out += value.is_object() ? "{" : "[";
  const std::string start = "\n" + std::string(indent + 1, ' ');
  for (auto it = value.begin(); it != value.end(); ++it) {
    if (it != value.begin()) out += ",";
    const std::string key = value.is_object() ? key_text(it.key()) : "";
    out += start + key;
    append(*it, indent + 1, indent + 1 + key.size(), out);
  }
  out += value.is_object() ? "}" : "]";
}

}  // namespace

std::string json_text(const ordered_json& value) {
  std::string out;
  append(value, 0, 0, out);
  return out + "\n";
}

ordered_json Numbers::missing(const std::string& what) {
  warnings_.push_back(what + " could not be computed; null stands in its place");
  return nullptr;
}

ordered_json Numbers::real(double value, const std::string& what) {
  return std::isfinite(value) ? ordered_json(value) : missing(what);
}

ordered_json Numbers::complex(std::complex<double> value, const std::string& what) {
  if (!std::isfinite(value.real()) || !std::isfinite(value.imag())) return missing(what);
  return ordered_json::array({value.real(), value.imag()});
}

ordered_json Numbers::phasor(std::complex<double> value, const char* key, const std::string& what) {
  ordered_json out = ordered_json::object();
  const bool finite = std::isfinite(value.real()) && std::isfinite(value.imag());
  const double angle = value == 0.0 ? 0.0 : std::arg(value) * 180.0 / std::numbers::pi;
  out[key] = finite ? ordered_json(std::abs(value)) : missing(what);
  out["angle_deg"] = finite ? ordered_json(angle) : ordered_json(nullptr);
  return out;
}

ordered_json Numbers::matrix(const Eigen::MatrixXd& m, const std::string& what) {
  if (!m.allFinite()) return missing(what);
  ordered_json rows = ordered_json::array();
  for (Eigen::Index i = 0; i < m.rows(); ++i) {
    ordered_json row = ordered_json::array();
    for (Eigen::Index j = 0; j < m.cols(); ++j) row.push_back(m(i, j));
    rows.push_back(row);
  }
  return rows;
}

ordered_json Numbers::matrix(const Eigen::MatrixXcd& m, const std::string& what) {
  ordered_json out;
  out["re"] = matrix(Eigen::MatrixXd(m.real()), what);
  out["im"] = matrix(Eigen::MatrixXd(m.imag()), what);
  return out;
}

}  // namespace io
