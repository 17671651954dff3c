#include "io/workbook.h"

#include <fmt/format.h>
#include <unistd.h>
#include <xlsxwriter.h>

#include <cmath>
#include <cstdio>
#include <cstdlib>
#include <filesystem>
#include <fstream>
#include <iterator>
#include <map>
#include <stdexcept>

#include "io/text_layout.h"

namespace io {
namespace {

constexpr std::size_t k_longest = 32'000;  // bytes in a cell; the format ends at 32767 letters
constexpr std::size_t k_longest_property = 200;
constexpr double k_line = 15.0;  // points
constexpr lxw_row_t k_last_row = LXW_ROW_MAX - 1;

/// Text as a cell can hold it: no control characters, not cut inside a letter.
std::string cell_text(const std::string& text, std::size_t longest = k_longest) {
  std::string out = printable(text);
  if (out.size() <= longest) return out;
  std::size_t end = longest;
  while (end > 0 && (static_cast<unsigned char>(out[end]) & 0xC0u) == 0x80u) --end;
  return out.substr(0, end) + "...";
}

/// Two or three digits over the sizes that occur; null for what is no figure.
const char* number_format(CellLook look) {
  switch (look) {
    case CellLook::volts:
      return "[>=10]0;[>=1]0.0;0.000";
    case CellLook::ohms:
      return "[>=1000]#,##0;[>=1]0.0;0.000";
    case CellLook::amperes:
      return "[>=1]0.0;[>=0.0001]0.00000;0.0E+00";
    case CellLook::degrees:
      return "0.0";
    case CellLook::share:
      return "0 %";
    default:
      return nullptr;
  }
}

lxw_format* format_of(lxw_workbook* book, CellLook look) {
  lxw_format* format = workbook_add_format(book);
  format_set_align(format, LXW_ALIGN_VERTICAL_TOP);
  if (look == CellLook::title) format_set_font_size(format, 14);
  if (look == CellLook::title || look == CellLook::head || look == CellLook::caution) format_set_bold(format);
  const bool wraps = look == CellLook::head || look == CellLook::wrapped || look == CellLook::caution;
  if (wraps) format_set_text_wrap(format);
  if (const char* digits = number_format(look)) format_set_num_format(format, digits);
  if (look == CellLook::head) format_set_bottom(format, LXW_BORDER_MEDIUM);
  if (look == CellLook::blank_to_fill) format_set_border(format, LXW_BORDER_THIN);
  return format;
}

/// Seconds of noon of "2024-05-17" in UTC; that of 2000-01-01 where there is no date.
std::time_t seconds_of(const std::string& date) {
  std::tm parts{};
  parts.tm_year = 100;
  parts.tm_mday = 1;
  int year = 0, month = 0, day = 0;
  if (std::sscanf(date.c_str(), "%d-%d-%d", &year, &month, &day) == 3) {
    parts.tm_year = year - 1900;
    parts.tm_mon = month - 1;
    parts.tm_mday = day;
  }
  parts.tm_hour = 12;
  return ::timegm(&parts);
}

/// A new file of our own that goes when this goes.
class TemporaryFile {
 public:
  TemporaryFile() {
    path_ = (std::filesystem::temp_directory_path() / "idlewire-XXXXXX").string();
    const int file = ::mkstemp(path_.data());
    if (file < 0)
      throw std::runtime_error("cannot make a temporary file in " +
                               std::filesystem::temp_directory_path().string());
    ::close(file);
  }
  ~TemporaryFile() { std::remove(path_.c_str()); }
  TemporaryFile(const TemporaryFile&) = delete;
  TemporaryFile& operator=(const TemporaryFile&) = delete;
  const std::string& path() const { return path_; }

 private:
  std::string path_;
};

}  // namespace

struct Workbook::State {
  TemporaryFile file;
  lxw_workbook* book = nullptr;
  std::map<CellLook, lxw_format*> formats;
  std::vector<std::shared_ptr<Worksheet::State>> sheets;
};

struct Worksheet::State {
  lxw_worksheet* sheet = nullptr;
  std::map<CellLook, lxw_format*>* formats = nullptr;
  lxw_row_t row = 0;
  lxw_row_t heads = 0;
  std::size_t columns = 0;  // of the table under the heads
  std::size_t left_out = 0;
  std::vector<lxw_row_t> breaks;

  lxw_format* format(CellLook look) const { return formats->at(look); }

  static void require(lxw_error error) {
    if (error != LXW_NO_ERROR)
      throw std::runtime_error(std::string("cannot make the workbook: ") + lxw_strerror(error));
  }

  void put(std::size_t column, const Cell& cell) const {
    const auto at = static_cast<lxw_col_t>(column);
    if (const double* number = std::get_if<double>(&cell.value)) {
      // A number that is none has no place in a spreadsheet.
      if (std::isfinite(*number)) require(worksheet_write_number(sheet, row, at, *number, format(cell.look)));
      return;
    }
    const std::string text = cell_text(std::get<std::string>(cell.value));
    require(text.empty() ? worksheet_write_blank(sheet, row, at, format(cell.look))
                         : worksheet_write_string(sheet, row, at, text.c_str(), format(cell.look)));
  }
};

void Worksheet::set_widths(const std::vector<double>& letters) {
  for (std::size_t c = 0; c < letters.size(); ++c)
    State::require(worksheet_set_column(state_->sheet, static_cast<lxw_col_t>(c), static_cast<lxw_col_t>(c),
                                        letters[c], nullptr));
}

void Worksheet::add(const std::vector<Cell>& cells) {
  if (state_->row >= k_last_row) {
    ++state_->left_out;
    return;
  }
  for (std::size_t c = 0; c < cells.size(); ++c) state_->put(c, cells[c]);
  ++state_->row;
}

void Worksheet::add(const std::string& text, CellLook look) { add(std::vector<Cell>{{text, look}}); }

void Worksheet::add_wide(const std::string& text, int columns, CellLook look, int lines) {
  if (state_->row >= k_last_row) return;
  State::require(worksheet_merge_range(state_->sheet, state_->row, 0, state_->row,
                                       static_cast<lxw_col_t>(columns - 1), cell_text(text).c_str(),
                                       state_->format(look)));
  State::require(worksheet_set_row(state_->sheet, state_->row, k_line * lines, nullptr));
  ++state_->row;
}

void Worksheet::add_plain_heads(const std::vector<std::string>& heads) {
  std::vector<Cell> cells;
  for (const std::string& head : heads) cells.push_back({head, CellLook::head});
  State::require(worksheet_set_row(state_->sheet, state_->row, k_line * 3, nullptr));
  add(cells);
}

void Worksheet::add_heads(const std::vector<std::string>& heads) {
  state_->heads = state_->row;
  state_->columns = heads.size();
  add_plain_heads(heads);
  worksheet_freeze_panes(state_->sheet, state_->row, 0);
  worksheet_repeat_rows(state_->sheet, state_->heads, state_->heads);
}

void Worksheet::end_table() {
  if (state_->row > state_->heads + 1)
    State::require(worksheet_autofilter(state_->sheet, state_->heads, 0, state_->row - 1,
                                        static_cast<lxw_col_t>(state_->columns - 1)));
}

void Worksheet::break_page() { state_->breaks.push_back(state_->row); }

void Worksheet::set_print(bool landscape, const std::string& footer) {
  if (landscape) worksheet_set_landscape(state_->sheet);
  worksheet_fit_to_pages(state_->sheet, 1, 0);
  State::require(worksheet_set_footer(state_->sheet, ("&L" + footer + "&R&P / &N").c_str()));
}

Workbook::Workbook(const std::string& title, const std::string& date) : state_(std::make_unique<State>()) {
  state_->book = workbook_new(state_->file.path().c_str());
  if (state_->book == nullptr) throw std::runtime_error("cannot make the workbook");
  std::string clean = cell_text(title, k_longest_property);
  lxw_doc_properties properties{};
  properties.title = clean.data();
  properties.created = seconds_of(date);
  Worksheet::State::require(workbook_set_properties(state_->book, &properties));
  for (const CellLook look : {CellLook::plain, CellLook::title, CellLook::head, CellLook::wrapped,
                              CellLook::caution, CellLook::blank_to_fill, CellLook::volts, CellLook::ohms,
                              CellLook::amperes, CellLook::degrees, CellLook::share})
    state_->formats[look] = format_of(state_->book, look);
}

Workbook::~Workbook() {
  if (state_->book != nullptr) lxw_workbook_free(state_->book);
}

Worksheet Workbook::add_sheet(const std::string& name) {
  auto sheet = std::make_shared<Worksheet::State>();
  sheet->sheet = workbook_add_worksheet(state_->book, name.c_str());
  if (sheet->sheet == nullptr)
    throw std::runtime_error("cannot add the sheet '" + name + "' to the workbook");
  sheet->formats = &state_->formats;
  state_->sheets.push_back(sheet);
  return Worksheet(sheet);
}

std::string Workbook::finish() {
  for (const auto& sheet : state_->sheets) {
    if (sheet->left_out > 0) {
      const std::string text = fmt::format("{} more rows do not fit into a spreadsheet", sheet->left_out);
      Worksheet::State::require(worksheet_write_string(sheet->sheet, k_last_row, 0, text.c_str(), nullptr));
    }
    if (sheet->breaks.empty()) continue;
    if (sheet->breaks.size() > LXW_BREAKS_MAX) sheet->breaks.resize(LXW_BREAKS_MAX);
    sheet->breaks.push_back(0);  // ends the list
    Worksheet::State::require(worksheet_set_h_pagebreaks(sheet->sheet, sheet->breaks.data()));
  }
  lxw_workbook* book = state_->book;
  state_->book = nullptr;  // closing frees it, whatever comes of it
  Worksheet::State::require(workbook_close(book));
  std::ifstream in(state_->file.path(), std::ios::binary);
  std::string bytes{std::istreambuf_iterator<char>(in), std::istreambuf_iterator<char>()};
  if (!in && !in.eof()) throw std::runtime_error("cannot read the workbook back");
  return bytes;
}

}  // namespace io
