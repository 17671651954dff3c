#include <fmt/format.h>

#include <algorithm>
#include <numbers>
#include <string>
#include <vector>

#include "engine/nesting.h"
#include "engine/outline.h"
#include "io/writers.h"

namespace io {
namespace {
using engine::CrossSection;
using engine::Surroundings;

constexpr double k_wide = 160.0;  // mm on paper, the drawing
constexpr double k_text = 3.2;    // mm, height of letters
constexpr double k_line = 4.6;    // mm, from one line of text to the next

/// The part of the plane to draw, m.
struct Frame {
  double left = 0, right = 0, bottom = 0, top = 0;
  bool empty = true;

  void take(const engine::Outline& outline) {
    const auto [low, high] = engine::bounds(outline);
    left = empty ? low.x() : std::min(left, low.x());
    right = empty ? high.x() : std::max(right, high.x());
    bottom = empty ? low.y() : std::min(bottom, low.y());
    top = empty ? high.y() : std::max(top, high.y());
    empty = false;
  }
};

Frame frame_of(const CrossSection& section) {
  Frame frame;
  for (const auto& conductor : section.conductors)
    frame.take({conductor.centre, {}, conductor.outer_radius()});
  for (const auto& body : section.bodies) frame.take(engine::outer_outline(body));
  for (const auto& shell : section.shells) frame.take(engine::covered_outline(shell));
  if (section.surroundings == Surroundings::metal_tube)
    frame.take({Eigen::Vector2d::Zero(), section.tube_core, section.tube_outer_radius});
  if (section.surroundings == Surroundings::plane) frame.bottom = std::min(frame.bottom, 0.0);
  const double margin = 0.04 * std::max({frame.right - frame.left, frame.top - frame.bottom, 1e-6});
  frame.left -= margin;
  frame.right += margin;
  frame.bottom -= margin;
  frame.top += margin;
  return frame;
}

/// Draws in millimetres of paper, y downwards.
class Paper {
 public:
  explicit Paper(const Frame& frame)
      : frame_(frame), scale_(k_wide / std::max(frame.right - frame.left, frame.top - frame.bottom)) {}

  double width() const { return (frame_.right - frame_.left) * scale_; }
  double height() const { return (frame_.top - frame_.bottom) * scale_; }
  double scale() const { return scale_; }  // mm of paper per m

  void circle(const Eigen::Vector2d& centre, double radius, const char* fill) {
    text_ += fmt::format(
        "<circle cx=\"{:.3f}\" cy=\"{:.3f}\" r=\"{:.3f}\" fill=\"{}\" stroke=\"black\" "
        "stroke-width=\"0.2\"/>\n",
        x(centre), y(centre.y()), radius * scale_, fill);
  }
  void outline(const engine::Outline& o, const char* fill) {
    if (o.is_circle()) return circle(o.centre, o.rounding, fill);
    const Eigen::Vector2d half = (o.core.half_size.array() + o.rounding) * scale_;
    text_ += fmt::format(
        "<rect x=\"{:.3f}\" y=\"{:.3f}\" width=\"{:.3f}\" height=\"{:.3f}\" rx=\"{:.3f}\" fill=\"{}\" "
        "stroke=\"black\" stroke-width=\"0.2\" transform=\"translate({:.3f} {:.3f}) rotate({:.4f})\"/>\n",
        -half.x(), -half.y(), 2 * half.x(), 2 * half.y(), o.rounding * scale_, fill, x(o.centre),
        y(o.centre.y()), -o.core.turn * 180 / std::numbers::pi);
  }
  void number(const Eigen::Vector2d& centre, double radius, std::size_t k) {
    const double size = std::clamp(radius * scale_, 1.2, k_text);
    text_ += fmt::format(
        "<text x=\"{:.3f}\" y=\"{:.3f}\" font-size=\"{:.2f}\" text-anchor=\"middle\" "
        "fill=\"black\" stroke=\"white\" stroke-width=\"{:.2f}\" paint-order=\"stroke\">{}</text>\n",
        x(centre), y(centre.y()) + 0.35 * size, size, 0.25 * size, k);
  }
  void ground_line() {
    text_ += fmt::format(
        "<line x1=\"0\" x2=\"{0:.3f}\" y1=\"{1:.3f}\" y2=\"{1:.3f}\" stroke=\"black\" "
        "stroke-width=\"0.6\"/>\n",
        width(), y(0.0));
  }
  const std::string& text() const { return text_; }

 private:
  double x(const Eigen::Vector2d& point) const { return (point.x() - frame_.left) * scale_; }
  double y(double height_above) const { return (frame_.top - height_above) * scale_; }

  Frame frame_;
  double scale_;
  std::string text_;
};

std::string escaped(const std::string& text) {
  std::string out;
  for (const char c : text) {
    if (c == '&')
      out += "&amp;";
    else if (c == '<')
      out += "&lt;";
    else if (c == '>')
      out += "&gt;";
    else
      out += static_cast<unsigned char>(c) < 0x20u ? '?' : c;
  }
  return out;
}

/// Layers from the outside in, then the metal.
void draw_covered(Paper& paper, const Eigen::Vector2d& centre, const std::vector<engine::Layer>& layers) {
  for (auto layer = layers.rbegin(); layer != layers.rend(); ++layer)
    paper.circle(centre, layer->outer_radius, layer == layers.rbegin() ? "#e4e4e4" : "#d0d0d0");
}

void draw(Paper& paper, const CrossSection& section) {
  if (section.surroundings == Surroundings::plane) paper.ground_line();
  if (section.surroundings == Surroundings::metal_tube) {
    paper.outline({Eigen::Vector2d::Zero(), section.tube_core, section.tube_outer_radius}, "#808080");
    paper.outline(engine::tube_outline(section), "white");
  }
  for (const auto& body : section.bodies) {
    paper.outline(engine::outer_outline(body), "#eeeeee");
    paper.outline(engine::inner_outline(body), body.filler.permittivity > 1.0 ? "#f6f6f6" : "white");
  }
  for (const auto& shell : section.shells) {
    draw_covered(paper, shell.centre, shell.layers);
    paper.outline(engine::metal_outline(shell), "#808080");
    paper.outline(engine::inner_outline(shell), "white");
  }
  for (const auto& conductor : section.conductors) {
    draw_covered(paper, conductor.centre, conductor.layers);
    paper.circle(conductor.centre, conductor.radius, "#808080");
  }
  std::size_t k = 0;
  for (const auto& conductor : section.conductors) paper.number(conductor.centre, conductor.radius, ++k);
  for (const auto& shell : section.shells)
    paper.number(shell.centre + Eigen::Vector2d(0.0, shell.core.half_size.y() + shell.outer_radius),
                 shell.outer_radius / 4, ++k);
}

std::string caption(const std::vector<std::string>& lines, double top) {
  std::string out;
  double y = top;
  for (const std::string& line : lines) {
    y += k_line;
    out +=
        fmt::format("<text x=\"0\" y=\"{:.2f}\" font-size=\"{:.1f}\">{}</text>\n", y, k_text, escaped(line));
  }
  return out;
}

/// The caution in lines that the paper's width holds; a letter is about half as wide as high.
std::vector<std::string> caution_lines() {
  std::vector<std::string> lines(1);
  std::string word;
  for (const char c : netlists::caution() + " ") {
    if (c != ' ') {
      word += c;
      continue;
    }
    if (lines.back().size() + word.size() > 95) lines.emplace_back();
    lines.back() += (lines.back().empty() ? "" : " ") + word;
    word.clear();
  }
  return lines;
}

}  // namespace

std::string section_svg(const CrossSection& section, const std::vector<std::string>& names) {
  Paper paper(frame_of(section));
  draw(paper, section);
  std::vector<std::string> lines;
  for (std::size_t k = 0; k < names.size(); ++k) lines.push_back(fmt::format("{}  {}", k + 1, names[k]));
  lines.push_back(fmt::format("1 mm is {:.1f} mm on paper", paper.scale() / 1e3));
  for (const std::string& line : caution_lines()) lines.push_back(line);
  const double height = paper.height() + k_line * (static_cast<double>(lines.size()) + 1);
  return fmt::format(
             "<svg xmlns=\"http://www.w3.org/2000/svg\" width=\"{0:.1f}mm\" height=\"{1:.1f}mm\" "
             "viewBox=\"0 0 {0:.1f} {1:.1f}\" font-family=\"sans-serif\">\n",
             k_wide, height) +
         paper.text() + caption(lines, paper.height()) + "</svg>\n";
}

}  // namespace io
