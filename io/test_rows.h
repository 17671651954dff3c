// The rows of the test sheets, the same on the page and in the workbook.
#pragma once

#include <string>
#include <vector>

#include "io/page_parts.h"

namespace io {

/// A conductor to test at a place, against one reference.
struct TestRow {
  const netlists::ConductorFindings* conductor = nullptr;
  const netlists::PlaceFindings* place = nullptr;
  std::size_t number = 0;  // of the conductor in the findings
  std::string reference;
  std::string stop;  // above which value to stop, or why none tells; plain text
};

/// What is tested at one place: a row for each conductor that is not simply fed or grounded by wire and each
/// reference it is judged by, and for a leg of an isolated supply one to its partner too.
struct TestSheet {
  std::string place;
  std::vector<TestRow> rows;
  std::vector<std::string> fed;       // ids, as drawn
  std::vector<std::string> grounded;  // ids, as drawn
  bool flagged = false;               // some conductor here misleads
};

/// One a place, in the order of the index.
std::vector<TestSheet> test_sheets(const PageModel& model, const PageIndex& index);

}  // namespace io
