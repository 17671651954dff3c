// Runs, and runs side by side, as lines of coupled conductors.
#include <fmt/format.h>

#include <algorithm>
#include <cmath>
#include <numbers>
#include <stdexcept>

#include "netlists/lowering.h"
#include "netlists/meter.h"

namespace netlists {
namespace {

constexpr double k_pi_error = 1e-6;  // relative error allowed a cell, (gamma l)^2 / 12

}  // namespace

void Lowering::add_lines() {
  std::vector<double> taken(building_.runs.size(), 0.0);  // m, of each run, from `begin`
  std::vector<std::string> begin(building_.runs.size());
  for (std::size_t r = 0; r < building_.runs.size(); ++r) begin[r] = building_.runs[r].from.text;
  meter().begin("cross-sections", static_cast<int>(building_.runs.size() + building_.alongside.size()));
  for (const Alongside& group : building_.alongside) add_joint(group, taken, begin);
  for (std::size_t r = 0; r < building_.runs.size(); ++r) {
    const Run& run = building_.runs[r];
    if (taken[r] >= run.length * (1 - 1e-9)) continue;
    const std::string far_end = begin[r] == run.to.text && taken[r] > 0 ? run.from.text : run.to.text;
    const std::string start = taken[r] > 0 ? "" : run.from.text;
    add_piece({{{static_cast<int>(r)}, {}}, run.length - taken[r], {start}, {far_end}});
  }
  moisture_warnings();
}

void Lowering::add_joint(const Alongside& group, std::vector<double>& taken,
                         std::vector<std::string>& begin) {
  Piece piece;
  piece.length = group.over.value_or(1e300);
  std::string what;
  for (const Name& name : group.runs) {
    const int run = run_index(name.text);
    what += (what.empty() ? "" : "+") + name.text;
    const auto raceway = building_.catalogue.raceways.find(building_.runs[run].raceway.text);
    const bool tray =
        raceway != building_.catalogue.raceways.end() && raceway->second.kind == RacewayKind::tray;
    if (tray || taken[run] > 0) {
      out_.warnings.push_back(
          fmt::format("alongside {}: run '{}' {}: its coupling to the others is left out", what, name.text,
                      tray ? "lies on a tray of its own" : "already lies alongside another"));
      return;
    }
    piece.stretch.runs.push_back(run);
    if (piece.stretch.runs.size() > 1) piece.stretch.spacing.push_back(group.spacing);
    piece.length = std::min(piece.length, building_.runs[run].length);
  }
  const std::string shared = shared_place(piece.stretch.runs);
  for (const int run : piece.stretch.runs) {
    const Run& model = building_.runs[run];
    begin[run] = shared.empty() ? model.from.text : shared;
    taken[run] = piece.length;
    const std::string far_end = begin[run] == model.from.text ? model.to.text : model.from.text;
    piece.from.push_back(begin[run]);
    piece.to.push_back(piece.length >= model.length * (1 - 1e-9) ? far_end : "");
  }
  add_piece(piece);
}

std::string Lowering::shared_place(const std::vector<int>& runs) const {
  for (const std::string& place : {building_.runs[runs[0]].from.text, building_.runs[runs[0]].to.text}) {
    if (std::all_of(runs.begin(), runs.end(), [&](int run) {
          return building_.runs[run].from.text == place || building_.runs[run].to.text == place;
        })) {
      return place;
    }
  }
  return "";
}

int Lowering::run_index(const std::string& name) const {
  for (std::size_t r = 0; r < building_.runs.size(); ++r) {
    if (building_.runs[r].name.text == name) return static_cast<int>(r);
  }
  throw std::invalid_argument("run '" + name + "' is not in the model");
}

int Lowering::row_point(const StretchRow& row, const std::string& place) {
  const Run& run = building_.runs[row.run];
  const std::string id = row.wire < 0 ? raceway_id(run) : wiring_.wires[row.wire].id;
  if (place.empty()) return joints_.point(id + "@within " + run.name.text);
  return joints_.point(row.wire < 0 ? id + "@" + place : wire_point(wiring_.wires[row.wire], place, row.run));
}

void Lowering::add_piece(const Piece& piece) {
  meter().step();
  const std::vector<StretchRow> rows = sections_.rows(piece.stretch);
  if (rows.empty()) return;
  engine::Line line;
  line.length = piece.length;
  line.matrices = sections_.matrices(piece.stretch, piece.length);
  std::vector<std::string> names;
  std::string run_names;
  for (const int run : piece.stretch.runs) {
    run_names += (run_names.empty() ? "" : "+") + building_.runs[run].name.text;
  }
  for (const StretchRow& row : rows) {
    const auto which = std::find(piece.stretch.runs.begin(), piece.stretch.runs.end(), row.run);
    const auto index = static_cast<std::size_t>(which - piece.stretch.runs.begin());
    line.from.push_back(row_point(row, piece.from[index]));
    line.to.push_back(row_point(row, piece.to[index]));
    names.push_back(row.wire < 0 ? raceway_id(building_.runs[row.run]) : wiring_.wires[row.wire].id);
  }
  line.cells = cells(*line.matrices, piece.length);
  line_rows_.push_back(rows);
  out_.network.lines.push_back(std::move(line));
  out_.line_runs.push_back(run_names);
  out_.line_stretches.push_back(piece.stretch);
  out_.line_conductors.push_back(std::move(names));
}

int Lowering::cells(const engine::LineMatrices& matrices, double length) const {
  const double omega = 2 * std::numbers::pi * building_.frequency;
  const double gamma_squared =
      matrices.impedance.cwiseAbs().maxCoeff() *
      (omega * matrices.capacitance.cwiseAbs().maxCoeff() + matrices.conductance.cwiseAbs().maxCoeff());
  const double count = std::ceil(length * std::sqrt(gamma_squared / (12 * k_pi_error)));
  return static_cast<int>(std::clamp(count, 1.0, 256.0));
}

void Lowering::moisture_warnings() {
  for (const Run& run : building_.runs) {
    if (run.condition == Moisture::dry) continue;
    out_.warnings.push_back(
        fmt::format("run '{}' is not dry: what moisture does to its insulation and surroundings is not "
                    "computed yet; real "
                    "readings there may be higher or lower than shown",
                    run.name.text));
  }
}

}  // namespace netlists
