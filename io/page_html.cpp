#include "io/page_html.h"

#include <fmt/format.h>
#include <openssl/evp.h>

#include <array>
#include <cmath>
#include <stdexcept>

#include "io/text_layout.h"

namespace io {

std::string html(std::string_view text) {
  std::string out;
  for (const char c : printable(std::string(text))) {
    switch (c) {
      case '&':
        out += "&amp;";
        break;
      case '<':
        out += "&lt;";
        break;
      case '>':
        out += "&gt;";
        break;
      case '"':
        out += "&quot;";
        break;
      case '\'':
        out += "&#39;";
        break;
      default:
        out += c;
    }
  }
  return out;
}

std::string px(double value, bool tenths) {
  if (!std::isfinite(value)) return "0";
  std::string text = fmt::format("{:.{}f}", value, tenths ? 1 : 0);
  if (tenths && text.ends_with(".0")) text.resize(text.size() - 2);
  return text == "-0" ? "0" : text;
}

HtmlTable::HtmlTable(std::string caption, std::vector<HtmlColumn> columns)
    : caption_(std::move(caption)), columns_(std::move(columns)) {}

void HtmlTable::add(const std::vector<std::string>& cells) {
  rows_ += "<tr>";
  for (std::size_t c = 0; c < cells.size(); ++c)
    rows_ += (c == 0 ? "<th scope=row>" : columns_[c].figure ? "<td class=n>" : "<td>") + cells[c];
  rows_ += '\n';
}

std::string HtmlTable::text() const {
  std::string out = "<table><caption>" + html(caption_) + "</caption><thead><tr>";
  for (const HtmlColumn& column : columns_)
    out += fmt::format("<th scope=col{}>{}", column.figure ? " class=n" : "", html(column.header));
  return out + "<tbody>" + rows_ + "</table>\n";
}

std::string html_list(const std::vector<std::string>& lines) {
  if (lines.empty()) return "";
  std::string out = "<ul>";
  for (const std::string& line : lines) out += "<li>" + html(line) + "\n";
  return out + "</ul>\n";
}

std::string scroll_box(const std::string& label, const std::string& inner) {
  return fmt::format("<div class=wide role=group tabindex=0 aria-label=\"{}\">{}</div>\n", html(label),
                     inner);
}

std::string policy_hash(std::string_view text) {
  std::array<unsigned char, EVP_MAX_MD_SIZE> digest{};
  unsigned size = 0;
  if (EVP_Digest(text.data(), text.size(), digest.data(), &size, EVP_sha256(), nullptr) != 1)
    throw std::runtime_error("SHA-256 failed");
  std::array<unsigned char, 2 * EVP_MAX_MD_SIZE> encoded{};
  const int length = EVP_EncodeBlock(encoded.data(), digest.data(), static_cast<int>(size));
  return {encoded.begin(), encoded.begin() + length};
}

}  // namespace io
