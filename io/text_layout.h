// Words, numbers and columns for a terminal and for paper.
#pragma once

#include <complex>
#include <string>
#include <vector>

namespace io {

/// Values in the units of the trade, rounded to `digits` significant digits but never before the
/// decimal point: "61 V", "530 kohm", "0.12 mA". What is not finite is "unknown".
std::string volts_text(double volts, int digits = 2);  // V down to 0.01, then mV, uV
std::string ohms_text(double ohms, int digits = 2);
std::string amperes_text(double amperes, int digits = 2);             // mA from 0.01 mA to 1 A
std::string phasor_text(std::complex<double> volts, int digits = 3);  // "41.0 V at -2.0 deg"
std::string degrees_text(std::complex<double> v);                     // "-88.9 deg"

/// A limit in volts that must not be overstated: three digits, rounded down. "1.48 V"
std::string limit_text(double volts);

/// Text as a terminal may see it: control characters, which could move the cursor or hide words, are
/// replaced by '?'.
std::string printable(const std::string& text);

/// Columns the text takes: UTF-8 code points, combining marks aside.
int columns_of(const std::string& text);

/// Lines of at most `width` columns, broken at spaces; a longer word breaks after punctuation or, in
/// the end, anywhere. Nothing is left out. At least one line, which may be empty.
std::vector<std::string> wrap(const std::string& text, int width);

/// Wrapped lines, each ended by a newline, the first after `first`, the others indented as far as it.
std::string paragraph(const std::string& first, const std::string& text, int width);

/// The same, the other lines after `indent` blanks, at most as many as `first` has columns.
std::string paragraph(const std::string& first, const std::string& text, int width, int indent);

/// A column of a table: its header, how wide it may grow, on which side its cells stand.
struct Column {
  std::string header;
  int most = 1000;  // columns
  bool right = false;
};

/// Rows under headers, two blanks between columns. A cell longer than its column wraps inside it.
class TextTable {
 public:
  explicit TextTable(std::vector<Column> columns) : columns_(std::move(columns)) {}
  void add(std::vector<std::string> cells) { rows_.push_back(std::move(cells)); }

  int width() const;                        // columns, of the widest line
  std::vector<std::string> blocks() const;  // the header, then each row: lines with newlines
  std::string indented(int indent) const;   // all of it
  std::size_t row_count() const { return rows_.size(); }

 private:
  std::vector<int> widths() const;
  std::string render(const std::vector<std::string>& cells, const std::vector<int>& widths) const;

  std::vector<Column> columns_;
  std::vector<std::vector<std::string>> rows_;
};

}  // namespace io
