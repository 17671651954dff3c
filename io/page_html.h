// Pieces of HTML. Whatever comes from a model goes through html(), and nothing else does.
#pragma once

#include <string>
#include <string_view>
#include <vector>

namespace io {

/// Text for an element or a quoted attribute: & < > " ' as entities, control characters as '?'.
std::string html(std::string_view text);

/// A coordinate of a drawing: rounded to a whole number, or to one decimal where `tenths`.
std::string px(double value, bool tenths = false);

/// A column of a table: its header, whether its cells are figures.
struct HtmlColumn {
  std::string header;  // plain text
  bool figure = false;
};

/// A table with a caption. The first cell of each row heads it; `cells` are HTML already. End tags that
/// HTML does not ask for are left out: pages of thousands of rows have to stay small.
class HtmlTable {
 public:
  HtmlTable(std::string caption, std::vector<HtmlColumn> columns);
  void add(const std::vector<std::string>& cells);
  bool empty() const { return rows_.empty(); }
  std::string text() const;

 private:
  std::string caption_;
  std::vector<HtmlColumn> columns_;
  std::string rows_;
};

/// A list of plain texts; "" where there are none.
std::string html_list(const std::vector<std::string>& lines);

/// A box that scrolls by itself where what it holds is wider than the page, reached by keyboard.
std::string scroll_box(const std::string& label, const std::string& inner);

/// Base64 of the SHA-256 of `text`, as a content security policy names a style or a script.
std::string policy_hash(std::string_view text);

}  // namespace io
