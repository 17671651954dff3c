#include <fmt/format.h>

#include <algorithm>
#include <map>

#include "io/findings_view.h"
#include "io/page_html.h"
#include "io/page_parts.h"
#include "io/plan_layout.h"
#include "io/text_layout.h"

namespace io {
namespace {
using netlists::ConductorFindings;
using netlists::Misleads;

constexpr std::size_t k_most_runs = 500;  // drawn; more would be neither small nor legible
constexpr double k_row = 36.0;            // drawing units
constexpr double k_lane = 18.0;
constexpr double k_curve = 64.0;       // width of the part where runs fan out
constexpr double k_letter = 6.2;       // width of a letter, about
constexpr std::size_t k_longest = 30;  // letters of a name in the drawing

/// The conductor to name at a run or place: the best rank, else the highest reading.
struct Worst {
  const ConductorFindings* conductor = nullptr;
  std::size_t number = 0;

  void take(const ConductorFindings& one, std::size_t k) {
    const auto weight = [](const ConductorFindings& c) {
      return std::pair(c.rank ? -*c.rank : -1'000'000'000, c.expected_reading);
    };
    if (conductor != nullptr && !(weight(one) > weight(*conductor))) return;
    conductor = &one;
    number = k;
  }

  std::string text() const {
    if (conductor == nullptr) return "Nothing in it but what is fed or grounded by wire as drawn.";
    std::string out = fmt::format("Worst: {}, {}", conductor->id, small_volts(conductor->expected_reading));
    return out + (conductor->misleads == Misleads::no
                      ? ", not flagged."
                      : ", " + netlists::to_string(conductor->misleads) + ".");
  }
};

std::string shortened(const std::string& name) {
  if (name.size() <= k_longest) return name;
  std::size_t end = k_longest - 1;
  while (end > 0 && (static_cast<unsigned char>(name[end]) & 0xC0u) == 0x80u) --end;
  return name.substr(0, end) + "...";
}

class Plan {
 public:
  Plan(const PageModel& model, const PageIndex& index, const std::vector<bool>& wanted)
      : model_(model), index_(index), layout_(plan_layout(model.building, wanted)) {
    for (std::size_t k = 0; k < model.findings.conductors.size(); ++k) take(k);
    set_columns();
  }

  std::string svg() const {
    std::string runs, nodes;
    for (const PlanEdge& edge : layout_.edges) runs += run(edge);
    for (const PlanNode& one : layout_.nodes) nodes += node(one);
    return fmt::format(
        "<svg width={0} height={1} viewBox=\"0 0 {0} {1}\" role=group aria-label=\"Panels, places and "
        "runs\">{2}{3}</svg>\n",
        px(width_), px(layout_.rows * k_row + 24), runs, nodes);
  }

 private:
  void take(std::size_t k) {
    const ConductorFindings& conductor = model_.findings.conductors[k];
    if (summed_up(conductor)) return;
    for (const std::string& run : index_.runs_of(conductor.id)) in_run_[run].take(conductor, k);
    for (const auto& place : conductor.places) at_place_[place.place].take(conductor, k);
  }

  /// The straight part of each column is as long as its longest name.
  void set_columns() {
    std::vector<std::size_t> letters(static_cast<std::size_t>(std::max(1, layout_.columns)), 8);
    for (const PlanNode& one : layout_.nodes) {
      auto& most = letters[static_cast<std::size_t>(one.column)];
      most = std::max(most, std::min(one.name.size(), k_longest));
    }
    for (const PlanEdge& edge : layout_.edges) {
      auto& most = letters[static_cast<std::size_t>(layout_.nodes[edge.to].column)];
      most = std::max(most, std::min(run_name(edge.run).size(), k_longest));
    }
    double x = 0.0;
    for (std::size_t c = 0; c < letters.size(); ++c) {
      x += (c == 0 ? 0.0 : k_curve) + k_letter * static_cast<double>(letters[c]) + 14;
      x_.push_back(x);
    }
    width_ = x + 20;
  }

  std::string run_name(std::size_t run) const {
    const auto& one = model_.building.runs[run];
    return fmt::format("{}, {:.3g} m", one.name.text, one.length);
  }

  double x(const PlanNode& node) const { return x_[static_cast<std::size_t>(node.column)]; }
  static double y(const PlanNode& node) { return 24 + node.row * k_row; }

  std::string path(const PlanEdge& edge) const {
    const PlanNode &from = layout_.nodes[edge.from], &to = layout_.nodes[edge.to];
    if (edge.closes)
      return fmt::format("M{} {}C{} {} {} {} {} {}", px(x(from)), px(y(from)), px(x(from) + 50), px(y(from)),
                         px(x(to) + 50), px(y(to)), px(x(to)), px(y(to)));
    const double end = y(to) + k_lane * edge.lane;
    return fmt::format("M{} {}C{} {} {} {} {} {}H{}", px(x(from)), px(y(from)), px(x(from) + k_curve / 2),
                       px(y(from)), px(x(from) + k_curve / 2), px(end), px(x(from) + k_curve), px(end),
                       px(x(to)));
  }

  const char* kind(const std::string& run) const {
    const auto found = in_run_.find(run);
    if (found == in_run_.end()) return "pr";
    switch (found->second.conductor->misleads) {
      case Misleads::false_dead:
        return "pr pd";
      case Misleads::false_live:
        return "pr pl";
      case Misleads::no:
        break;
    }
    return found->second.conductor->expected_reading >= 3.0 ? "pr pu" : "pr";
  }

  std::string run(const PlanEdge& edge) const {
    const auto& one = model_.building.runs[edge.run];
    const PlanNode &from = layout_.nodes[edge.from], &to = layout_.nodes[edge.to];
    const auto found = in_run_.find(one.name.text);
    const Worst worst = found == in_run_.end() ? Worst() : found->second;
    const std::string raceway = one.raceway.text == "none" ? "no raceway" : one.raceway.text;
    // What a person sees has to begin what a screen reader says.
    const std::string seen = shortened(run_name(edge.run));
    const std::string told = fmt::format("{}: run {} from {} to {}, {}. {}", seen, one.name.text,
                                         one.from.text, one.to.text, raceway, worst.text());
    const std::string link = worst.conductor != nullptr && index_.has_sheet(worst.number)
                                 ? fmt::format("c{}", worst.number)
                                 : place_anchor(to.name);
    const std::string line = path(edge);
    const double label_x = edge.closes ? std::max(x(from), x(to)) + 42 : x(to) - 8;
    const double label_y = edge.closes ? (y(from) + y(to)) / 2 : y(to) + k_lane * edge.lane + 11;
    return fmt::format(
        "<a href=#{} aria-label=\"{}\"><path class=\"{}\" d=\"{}\" /><path class=ph d=\"{}\" /><text "
        "class=\"pn e\" x={} y={}>{}</text></a>\n",
        link, html(told), kind(one.name.text), line, line, px(label_x), px(label_y), html(seen));
  }

  std::string place_anchor(const std::string& place) const {
    const int number = index_.place_number(place);
    return number < 0 ? "plan" : fmt::format("t{}", number);
  }

  std::string node(const PlanNode& one) const {
    const auto found = at_place_.find(one.name);
    const Worst worst = found == at_place_.end() ? Worst() : found->second;
    const std::string seen = shortened(one.name);
    const std::string told = fmt::format("{}: {}{}. {}", seen, one.panel ? "panel" : "place",
                                         seen == one.name ? "" : " " + one.name, worst.text());
    const double half = one.panel ? 7 : 4;
    return fmt::format(
        "<a href=#{} aria-label=\"{}\"><rect class=\"{}\" x={} y={} width={} height={} /><text class=e x={} "
        "y={}>{}</text></a>\n",
        place_anchor(one.name), html(told), one.panel ? "pp pb" : "pp", px(x(one) - half), px(y(one) - half),
        px(2 * half), px(2 * half + k_lane * std::max(0, one.lanes - 1)), px(x(one) - (one.panel ? 10 : 6)),
        px(y(one) - 6), html(seen));
  }

  const PageModel& model_;
  const PageIndex& index_;
  PlanLayout layout_;
  std::map<std::string, Worst> in_run_;
  std::map<std::string, Worst> at_place_;
  std::vector<double> x_;  // by column
  double width_ = 0.0;
};

/// All runs, or in a large building those of the conductors first in the list with their ways to a panel.
std::vector<bool> wanted_runs(const PageModel& model, const PageIndex& index) {
  const auto& runs = model.building.runs;
  if (runs.size() <= k_most_runs) return std::vector<bool>(runs.size(), true);
  std::map<std::string, std::size_t> number;
  for (std::size_t r = 0; r < runs.size(); ++r) number[runs[r].name.text] = r;
  const auto ways = ways_to_panels(model.building);
  std::vector<bool> wanted(runs.size(), false);
  std::size_t count = 0;
  for (const ConductorFindings& conductor : model.findings.conductors) {
    if (summed_up(conductor)) continue;
    for (const std::string& name : index.runs_of(conductor.id)) {
      const auto found = number.find(name);
      if (found == number.end() || count >= k_most_runs) continue;
      for (const std::size_t run : ways[found->second]) {
        if (!wanted[run]) ++count;
        wanted[run] = true;
      }
    }
  }
  return wanted;
}

}  // namespace

std::string page_plan(const PageModel& model, const PageIndex& index) {
  const std::vector<bool> wanted = wanted_runs(model, index);
  const auto drawn = std::count(wanted.begin(), wanted.end(), true);
  std::string out =
      "<section id=plan aria-labelledby=plan-h><h2 id=plan-h>Plan</h2>\n<p>Panels, places and runs, laid out "
      "from the "
      "model, not to scale. A run is drawn by the worst conductor in it that is not fed or grounded by wire: "
      "<b class=fd>false_dead</b> a solid heavy line, <b class=fl>false_live</b> a broken one, not flagged "
      "but of 3 V "
      "and more a line of middle weight, all else a thin one. Runs lead to the sheet of that conductor, "
      "places to their "
      "test sheet.</p>\n<p id=told aria-live=polite></p>\n";
  if (drawn < static_cast<long>(wanted.size()))
    out += fmt::format(
        "<p>{} of {} runs are drawn, those of the conductors first in the list, with their ways to a "
        "panel.</p>\n",
        drawn, wanted.size());
  return out + scroll_box("Plan", Plan(model, index, wanted).svg()) + "</section>\n";
}

}  // namespace io
