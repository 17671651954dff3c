// What the writers for people pick from the findings: the place of a row, its readings, its words.
#pragma once

#include <optional>
#include <string>
#include <vector>

#include "netlists/findings.h"

namespace io {

/// A current that people feel, IEC 60479-1, threshold of perception.
inline constexpr double k_felt = 0.5e-3;  // A

/// The place and reference a row of the table speaks of: those of the judged reading that misleads
/// and lies nearest to the reading the conductor is ranked by; where nothing misleads, those of the
/// highest open-circuit voltage. `place` is null where the conductor can be reached nowhere.
struct Focus {
  const netlists::PlaceFindings* place = nullptr;
  std::string reference;
};
Focus focus(const netlists::ConductorFindings& conductor);

/// True for a conductor that one line can sum up: fed or grounded by wire, as drawn, not flagged, of
/// no isolated supply.
bool summed_up(const netlists::ConductorFindings& conductor);

/// Names of the voltmeters that read anything, in the order of the model or else of appearance.
std::vector<std::string> voltmeters(const netlists::Findings& findings);

/// The entry that contributes most, "others" aside where it can be; null without contributions.
const netlists::ContributionEntry* main_aggressor(const netlists::PlaceFindings& place);

/// The conductor against which a voltmeter reads most at a place, without being judged: one of the
/// same circuit where there is one. Such a reading may settle a case. "" where there is none.
std::string telling_partner(const netlists::ConductorFindings& conductor,
                            const netlists::PlaceFindings& place);

/// What the condition says, in words: "floating: neither a wire, ...".
std::string condition_in_words(const netlists::ConductorFindings& conductor);

/// "false_live" in words; "not flagged" where nothing misleads.
std::string misleads_in_words(const netlists::ConductorFindings& conductor);

/// "probability 0.27, give or take 0.03, if the drawing is right"; "" without draws.
std::string chance_in_words(const netlists::ConductorFindings& conductor);

/// What `instrument` reads at the row's place against its reference: "61 V", "12 to 33 V" where more
/// than one range was used, "-" where nothing.
std::string reading_text(const Focus& at, const std::string& instrument);

/// Volts in a table: what no instrument shows is not spelt out, "<0.01 V".
std::string small_volts(double volts);

/// "43 to 71 V", from the 5th to the 95th percentile over the draws, as `text` writes one value; "" without.
std::string spread_text(const std::optional<netlists::Band>& band,
                        std::string (*text)(double value, int digits));

/// The chance that a conductor misleads in the way said, over the draws: "27 %", "under 1 %"; "" without.
std::string chance_text(const netlists::ConductorFindings& conductor);

/// What moves the reading a conductor is ranked by, largest first: "layouts in B62: 85 % of the variance,
/// 6.7 V a standard deviation".
std::vector<std::string> influences_in_words(const netlists::ConductorFindings& conductor);

/// What settles a conductor, whole sentences; that a reading below a limit proves nothing among them.
std::string settle_in_words(const netlists::ConductorFindings& conductor);

/// What else the instruments may show at a place: on other ranges, with leads swapped. One sentence each.
std::vector<std::string> reading_remarks(const netlists::PlaceFindings& place);

/// The title, or what stands for it; may hold anything the model's file held.
std::string sheet_title(const netlists::Findings& findings);

/// Stage, frequency, model, date and program in one line of words.
std::string sheet_facts(const netlists::Findings& findings, const std::string& date);

/// Every breaker and switch state assumed, in one line; "none in this model".
std::string states_in_words(const netlists::Findings& findings);

/// What a sheet of expected readings says of itself, in two sentences.
std::string sheet_warning();

/// Title and facts, then the caution, for a terminal.
std::string sheet_head(const netlists::Findings& findings, const std::string& date, int width);

/// States assumed, assumptions, warnings, and what a sheet of expected readings must say of itself.
std::string sheet_foot(const netlists::Findings& findings, int width);

}  // namespace io
