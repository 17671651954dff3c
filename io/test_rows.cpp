#include "io/test_rows.h"

#include <fmt/format.h>

#include <algorithm>

#include "io/findings_view.h"
#include "io/text_layout.h"

namespace io {
namespace {
using netlists::Condition;
using netlists::ConductorFindings;
using netlists::PlaceFindings;
using netlists::Reading;

std::vector<std::string> references(const ConductorFindings& conductor, const PlaceFindings& place) {
  std::vector<std::string> out;
  for (const Reading& reading : place.readings)
    if (reading.judged && std::find(out.begin(), out.end(), reading.reference) == out.end())
      out.push_back(reading.reference);
  if (out.empty()) out.push_back(place.reference);
  const std::string partner = conductor.isolated_supply ? telling_partner(conductor, place) : "";
  if (!partner.empty() && std::find(out.begin(), out.end(), partner) == out.end()) out.push_back(partner);
  return out;
}

/// When to stop: above which value, or why no value tells.
std::string stop_text(const ConductorFindings& conductor, bool to_ground) {
  if (conductor.isolated_supply && !to_ground) return "full voltage to its partner: live";
  if (conductor.isolated_supply) return "isolated supply: no reading to ground settles it; treat as live";
  if (conductor.condition == Condition::energised || conductor.condition == Condition::through_load)
    return "fed as drawn: treat as live whatever it reads";
  if (conductor.settle.instrument)
    return fmt::format("above {} on {}", limit_text(conductor.settle.treat_as_live_above),
                       *conductor.settle.instrument);
  return "none of these instruments settles it; treat as live";
}

}  // namespace

std::vector<TestSheet> test_sheets(const PageModel& model, const PageIndex& index) {
  std::vector<TestSheet> sheets;
  for (const std::string& place : index.places()) sheets.push_back({place, {}, {}, {}, false});
  for (std::size_t k = 0; k < model.findings.conductors.size(); ++k) {
    const ConductorFindings& conductor = model.findings.conductors[k];
    for (const PlaceFindings& place : conductor.places) {
      TestSheet& sheet = sheets[static_cast<std::size_t>(index.place_number(place.place))];
      if (conductor.misleads != netlists::Misleads::no) sheet.flagged = true;
      if (summed_up(conductor)) {
        (conductor.condition == Condition::grounded ? sheet.grounded : sheet.fed).push_back(conductor.id);
        continue;
      }
      for (const std::string& reference : references(conductor, place))
        sheet.rows.push_back(
            {&conductor, &place, k, reference, stop_text(conductor, reference == place.reference)});
    }
  }
  return sheets;
}

}  // namespace io
