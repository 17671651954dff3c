// A spreadsheet file being filled, one row after the other.
#pragma once

#include <memory>
#include <optional>
#include <string>
#include <variant>
#include <vector>

namespace io {

/// How a cell looks. Figures show as many digits as make sense and keep them all.
enum class CellLook {
  plain,
  title,
  head,
  wrapped,
  caution,
  blank_to_fill,
  volts,
  ohms,
  amperes,
  degrees,
  share
};

/// A cell: text that stays text whatever it begins with, or a number; one that is not finite is left empty.
struct Cell {
  std::variant<std::string, double> value;
  CellLook look = CellLook::plain;
};

class Workbook;

/// One sheet of a workbook, filled from the top. A spreadsheet ends at 1048576 rows: what does not fit is
/// counted, and its last row says so.
class Worksheet {
 public:
  /// Widths in letters, of as many columns as there are.
  void set_widths(const std::vector<double>& letters);
  void add(const std::vector<Cell>& cells);
  void add(const std::string& text, CellLook look = CellLook::plain);  // a row of one cell
  /// Texts over as many columns, wrapped; takes so many lines of height.
  void add_wide(const std::string& text, int columns, CellLook look, int lines);
  /// The row of column heads: stays in sight, filters what follows until end_table().
  void add_heads(const std::vector<std::string>& heads);
  void end_table();
  /// Column heads in the middle of a sheet, nothing kept in sight.
  void add_plain_heads(const std::vector<std::string>& heads);
  /// Later rows begin on a new printed page.
  void break_page();
  /// Printed across the page's width, on the side that is wanted, with a footer.
  void set_print(bool landscape, const std::string& footer);

 private:
  friend class Workbook;
  struct State;
  explicit Worksheet(std::shared_ptr<State> state) : state_(std::move(state)) {}
  std::shared_ptr<State> state_;
};

/// An XLSX file (ECMA-376) by libxlsxwriter. The same content gives the same bytes.
class Workbook {
 public:
  /// `title` and `date` ("2024-05-17", or "") become the file's properties.
  Workbook(const std::string& title, const std::string& date);
  ~Workbook();
  Workbook(const Workbook&) = delete;
  Workbook& operator=(const Workbook&) = delete;

  Worksheet add_sheet(const std::string& name);  // at most 31 letters, each name once

  /// The file's bytes; the workbook is done then. Throws std::runtime_error where it cannot be made.
  std::string finish();

 private:
  struct State;
  std::unique_ptr<State> state_;
};

}  // namespace io
