#include "io/findings_xlsx.h"

#include <algorithm>
#include <cmath>
#include <cstdlib>
#include <numbers>

#include "io/findings_view.h"
#include "io/test_rows.h"
#include "io/text_layout.h"
#include "io/workbook.h"

namespace io {
namespace {
using netlists::ConductorFindings;
using netlists::PlaceFindings;
using netlists::Reading;

/// A limit in volts that must not be overstated: three digits, rounded down.
double limit(double volts) {
  return std::isfinite(volts) ? std::strtod(limit_text(volts).c_str(), nullptr) : volts;
}

constexpr int k_columns = 10;  // that the caution is laid over

double degrees(std::complex<double> phasor) { return std::arg(phasor) * 180 / std::numbers::pi; }

/// Title, facts and caution, as on every sheet for people.
Worksheet headed(Workbook& book, const PageModel& model, const std::string& name) {
  Worksheet sheet = book.add_sheet(name);
  sheet.set_print(true, "A prediction is not a test. " + sheet_warning());
  sheet.add(sheet_title(model.findings), CellLook::title);
  sheet.add(sheet_facts(model.findings, model.date));
  sheet.add_wide(netlists::caution() + " " + sheet_warning(), k_columns, CellLook::caution, 3);
  return sheet;
}

std::string condition_text(const ConductorFindings& conductor) {
  return to_string(conductor.condition) + (conductor.isolated_supply ? ", isolated supply" : "") +
         (conductor.not_predicted ? ", not predicted: expect more" : "");
}

/// The reading of an instrument at a place, empty where there is none.
Cell reading_cell(const Focus& at, const std::string& instrument) {
  if (at.place == nullptr) return {std::string()};
  for (const Reading& reading : at.place->readings)
    if (reading.instrument == instrument && reading.reference == at.reference)
      return {reading.volts, CellLook::volts};
  return {std::string()};
}

void add_ranked(Workbook& book, const PageModel& model, const PageIndex& index) {
  Worksheet sheet = headed(book, model, "Ranked list");
  std::vector<double> widths{6, 24, 10, 18, 14, 22, 12, 9};
  std::vector<std::string> heads{"rank", "conductor", "panel", "at", "to", "condition", "verdict", "chance"};
  for (const std::string& name : index.instruments()) {
    heads.push_back(name + " (V)");
    widths.push_back(std::max(10.0, 1.2 * static_cast<double>(name.size())));
  }
  for (const char* head :
       {"source impedance (ohm)", "short circuit, computed (A)", "settled by", "treat as live above (V)"}) {
    heads.emplace_back(head);
    widths.push_back(14);
  }
  sheet.set_widths(widths);
  sheet.add_heads(heads);
  for (const ConductorFindings& conductor : model.findings.conductors) {
    const Focus at = focus(conductor);
    std::vector<Cell> row{
        conductor.rank ? Cell{static_cast<double>(*conductor.rank)} : Cell{std::string()},
        {conductor.id},
        {index.panel_of(conductor.id)},
        {at.place == nullptr ? std::string() : at.place->place},
        {at.reference},
        {condition_text(conductor)},
        {conductor.misleads == netlists::Misleads::no ? "not flagged" : to_string(conductor.misleads)}};
    row.push_back(conductor.probability ? Cell{*conductor.probability, CellLook::share}
                                        : Cell{std::string()});
    for (const std::string& name : index.instruments()) row.push_back(reading_cell(at, name));
    row.push_back(at.place == nullptr ? Cell{std::string()}
                                      : Cell{std::abs(at.place->source_impedance), CellLook::ohms});
    row.push_back(at.place == nullptr ? Cell{std::string()}
                                      : Cell{at.place->short_circuit, CellLook::amperes});
    row.push_back({conductor.settle.instrument.value_or("")});
    row.push_back(conductor.settle.instrument ? Cell{limit(conductor.settle.treat_as_live_above)}
                                              : Cell{std::string()});
    sheet.add(row);
  }
  sheet.end_table();
}

/// What shows at each place of each conductor: its sheet in a row.
void add_sheets(Workbook& book, const PageModel& model) {
  Worksheet sheet = headed(book, model, "Sheets");
  sheet.set_widths({24, 18, 14, 12, 12, 14, 12, 14, 22, 12, 60});
  sheet.add_heads({"conductor", "at", "to", "open circuit (V)", "angle (deg)", "source impedance (ohm)",
                   "angle (deg)", "short circuit, computed (A)", "condition", "verdict", "what settles it"});
  for (const ConductorFindings& conductor : model.findings.conductors)
    for (const PlaceFindings& place : conductor.places)
      sheet.add(
          {{conductor.id},
           {place.place},
           {place.reference},
           {std::abs(place.open_circuit), CellLook::volts},
           {degrees(place.open_circuit), CellLook::degrees},
           {std::abs(place.source_impedance), CellLook::ohms},
           {degrees(place.source_impedance), CellLook::degrees},
           {place.short_circuit, CellLook::amperes},
           {condition_text(conductor)},
           {conductor.misleads == netlists::Misleads::no ? "not flagged" : to_string(conductor.misleads)},
           {settle_in_words(conductor)}});
  sheet.end_table();
}

void add_readings(Workbook& book, const PageModel& model) {
  Worksheet sheet = headed(book, model, "Readings");
  sheet.set_widths({24, 18, 18, 20, 12, 12, 10, 10, 10, 12, 10});
  sheet.add_heads({"conductor", "at", "instrument", "to", "range (V)", "reading (V)", "p05 (V)", "p50 (V)",
                   "p95 (V)", "appearance", "judged"});
  using netlists::Band;
  const auto percentile = [](const Reading& reading, double Band::*which) {
    return reading.band ? Cell{(*reading.band).*which, CellLook::volts} : Cell{std::string()};
  };
  for (const ConductorFindings& conductor : model.findings.conductors)
    for (const PlaceFindings& place : conductor.places)
      for (const Reading& reading : place.readings)
        sheet.add({{conductor.id},
                   {place.place},
                   {reading.instrument},
                   {reading.reference},
                   reading.range ? Cell{*reading.range} : Cell{std::string()},
                   {reading.volts, CellLook::volts},
                   percentile(reading, &Band::p05),
                   percentile(reading, &Band::p50),
                   percentile(reading, &Band::p95),
                   {to_string(reading.appearance)},
                   {std::string(reading.judged ? "yes" : "no")}});
  sheet.end_table();
}

void add_contributions(Workbook& book, const PageModel& model) {
  Worksheet sheet = headed(book, model, "Contributions");
  sheet.set_widths({24, 18, 24, 12, 14, 12});
  sheet.add_heads({"conductor", "at", "from", "path", "volts (V)", "angle (deg)"});
  for (const ConductorFindings& conductor : model.findings.conductors)
    for (const PlaceFindings& place : conductor.places)
      for (const auto& entry : place.contributions)
        sheet.add({{conductor.id},
                   {place.place},
                   {entry.from},
                   {entry.path},
                   {std::abs(entry.volts), CellLook::volts},
                   {degrees(entry.volts), CellLook::degrees}});
  sheet.end_table();
}

void add_test_sheet(Worksheet& sheet, const PageModel& model, const PageIndex& index, const TestSheet& test) {
  sheet.add("Test sheet: " + test.place, CellLook::title);
  sheet.add(sheet_title(model.findings) + ". " + sheet_facts(model.findings, model.date));
  sheet.add_wide(netlists::caution() + " " + sheet_warning(), k_columns, CellLook::caution, 3);
  std::vector<std::string> heads{"conductor", "to"};
  for (const std::string& name : index.instruments())
    heads.push_back(name + " reads if it is coupling only (V)");
  heads.insert(heads.end(), {"stop at", "measured", "with", "time, by"});
  sheet.add_plain_heads(heads);
  for (const TestRow& row : test.rows) {
    std::vector<Cell> cells{{row.conductor->id, CellLook::wrapped}, {row.reference, CellLook::wrapped}};
    for (const std::string& name : index.instruments())
      cells.push_back(reading_cell({row.place, row.reference}, name));
    cells.push_back({row.stop, CellLook::wrapped});
    for (int k = 0; k < 3; ++k) cells.push_back({std::string(), CellLook::blank_to_fill});
    sheet.add(cells);
  }
  const auto names = [&sheet](const char* title, const std::vector<std::string>& list) {
    std::string text;
    for (const std::string& name : list) text += (text.empty() ? "" : ", ") + name;
    if (!text.empty())
      sheet.add_wide(title + text, k_columns, CellLook::wrapped,
                     1 + static_cast<int>(std::min<std::size_t>(20, text.size() / 110)));
  };
  names("Fed here as drawn, live: ", test.fed);
  names("Grounded here, if the drawing is right; test as live: ", test.grounded);
  const std::string states = "Breakers and switches as assumed: " + states_in_words(model.findings);
  if (states.size() <= 3000)
    sheet.add_wide(states, k_columns, CellLook::wrapped, 1 + static_cast<int>(states.size() / 110));
  else
    sheet.add("Breakers and switches as assumed: each one is listed under Notes; print it with this sheet");
  sheet.break_page();
}

void add_tests(Workbook& book, const PageModel& model, const PageIndex& index) {
  Worksheet sheet = book.add_sheet("Test sheets");
  sheet.set_print(true, "A prediction is not a test. " + sheet_warning());
  std::vector<double> widths{22, 18};
  for (std::size_t k = 0; k < index.instruments().size(); ++k) widths.push_back(16);
  widths.insert(widths.end(), {26, 14, 14, 14});
  sheet.set_widths(widths);
  for (const TestSheet& test : test_sheets(model, index)) add_test_sheet(sheet, model, index, test);
}

void add_notes(Workbook& book, const PageModel& model) {
  Worksheet sheet = headed(book, model, "Notes");
  sheet.set_widths({100});
  const auto list = [&sheet](const char* title, const std::vector<std::string>& lines) {
    if (lines.empty()) return;
    sheet.add(title, CellLook::head);
    for (const std::string& line : lines) sheet.add(line, CellLook::wrapped);
  };
  list("Model", {"SHA-256 of the model file: " + model.findings.model_sha256});
  list("Warnings", model.findings.warnings);
  list("Breakers and switches as assumed", model.findings.states);
  list("Assumptions and defaults in force", model.findings.assumptions);
}

}  // namespace

std::string findings_xlsx(const PageModel& model) {
  const PageIndex index(model);
  Workbook book(sheet_title(model.findings), model.date);
  add_ranked(book, model, index);
  add_sheets(book, model);
  add_readings(book, model);
  add_contributions(book, model);
  add_tests(book, model, index);
  add_notes(book, model);
  return book.finish();
}

}  // namespace io
