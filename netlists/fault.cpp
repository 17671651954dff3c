#include "netlists/fault.h"

#include <fmt/format.h>

#include <algorithm>
#include <numeric>
#include <tuple>

namespace netlists {
namespace {

std::size_t edit_distance(const std::string& a, const std::string& b) {
  std::vector<std::size_t> row(b.size() + 1);
  std::iota(row.begin(), row.end(), std::size_t{0});
  for (std::size_t i = 1; i <= a.size(); ++i) {
    std::size_t diagonal = row[0];
    row[0] = i;
    for (std::size_t j = 1; j <= b.size(); ++j) {
      const std::size_t above = row[j];
      row[j] = std::min({above + 1, row[j - 1] + 1, diagonal + (a[i - 1] == b[j - 1] ? 0u : 1u)});
      diagonal = above;
    }
  }
  return row[b.size()];
}

}  // namespace

std::string to_string(const Fault& fault) {
  const char* severity = fault.severity == Severity::error ? "error" : "warning";
  if (fault.mark.file.empty()) return fmt::format("{}: {}", severity, fault.what);
  if (fault.mark.line == 0) return fmt::format("{}: {}: {}", fault.mark.file, severity, fault.what);
  return fmt::format("{}:{}:{}: {}: {}", fault.mark.file, fault.mark.line, fault.mark.column, severity,
                     fault.what);
}

bool any_error(const std::vector<Fault>& faults) {
  return std::any_of(faults.begin(), faults.end(),
                     [](const Fault& f) { return f.severity == Severity::error; });
}

std::string nearest(const std::string& word, const std::vector<std::string>& candidates) {
  std::string best;
  std::size_t best_distance = std::max<std::size_t>(1, word.size() / 3) + 1;
  for (const auto& candidate : candidates) {
    const std::size_t lengths =
        word.size() > candidate.size() ? word.size() - candidate.size() : candidate.size() - word.size();
    if (lengths >= best_distance) continue;  // the distance is never less: a long junk word costs nothing
    const std::size_t distance = edit_distance(word, candidate);
    if (distance < best_distance) {
      best_distance = distance;
      best = candidate;
    }
  }
  return best;
}

std::string nearest_hint(const std::string& word, const std::vector<std::string>& candidates) {
  const std::string near = nearest(word, candidates);
  return near.empty() ? near : fmt::format("; the nearest is '{}'", near);
}

void sort_by_place(std::vector<Fault>& faults) {
  const auto key = [](const Fault& f) {
    return std::tie(f.mark.file, f.mark.line, f.mark.column, f.severity, f.what);
  };
  std::stable_sort(faults.begin(), faults.end(),
                   [&](const Fault& a, const Fault& b) { return key(a) < key(b); });
  const auto same = [&](const Fault& a, const Fault& b) { return key(a) == key(b); };
  faults.erase(std::unique(faults.begin(), faults.end(), same), faults.end());
}

}  // namespace netlists
