// Faults of a user's file: where, and what would be right.
#pragma once

#include <string>
#include <vector>

namespace netlists {

/// A place in a user's file. Line and column count from 1; 0: made by a program, no place.
struct Mark {
  std::string file;
  int line = 0;
  int column = 0;
};

enum class Severity { error, warning };

/// `what` names the thing by the user's own name, says what was found and what would do.
struct Fault {
  Severity severity = Severity::error;
  Mark mark;
  std::string what;
};

/// "file:line:column: error: what"; without a place, "file: error: what" or "error: what".
std::string to_string(const Fault& fault);

/// True if any of the faults is an error.
bool any_error(const std::vector<Fault>& faults);

/// The candidate with the least edit distance from `word`, if it is at most a third of its length
/// (never under 1, so that one slip is always forgiven), else "".
std::string nearest(const std::string& word, const std::vector<std::string>& candidates);

/// "; the nearest is 'WORD'" to end a message with, "" if there is none near.
std::string nearest_hint(const std::string& word, const std::vector<std::string>& candidates);

/// Sorts by file, line and column, as a reader of the file meets them; drops repetitions.
void sort_by_place(std::vector<Fault>& faults);

}  // namespace netlists
