#include "daemon/render/svg_plot.hpp"

#include <algorithm>
#include <array>
#include <cmath>

#include "core/base/number_text.hpp"
#include "daemon/render/page_text.hpp"
#include "daemon/render/svg_ticks.hpp"

namespace agreed {
namespace {

constexpr double kFarOff = 1e5;  // positions beyond it are clipped anyway and only lengthen the text

std::string position(double value) {
  std::string number = fixed(std::clamp(value, -kFarOff, kFarOff), 1);
  if (number.ends_with(".0")) number.resize(number.size() - 2);
  return number;
}

std::string attribute(std::string_view name, std::string_view value) {
  return " " + std::string(name) + "=\"" + std::string(value) + "\"";
}

std::string text_element(double x, double y, std::string_view css, std::string_view words) {
  return "<text" + attribute("class", css) + attribute("x", position(x)) + attribute("y", position(y)) + ">" +
         escaped(words) + "</text>";
}

std::string line_element(double x1, double y1, double x2, double y2, std::string_view css) {
  return "<line" + attribute("class", css) + attribute("x1", position(x1)) + attribute("y1", position(y1)) +
         attribute("x2", position(x2)) + attribute("y2", position(y2)) + "/>";
}

std::string rectangle(double x, double y, double width, double height, std::string_view css) {
  return "<rect" + attribute("class", css) + attribute("x", position(x)) + attribute("y", position(y)) +
         attribute("width", position(std::max(0.0, width))) +
         attribute("height", position(std::max(0.0, height))) + "/>";
}

std::string vertices(double x, double y, const std::vector<PlotPoint>& around, bool closed) {
  std::string d;
  for (const PlotPoint& p : around)
    d += (d.empty() ? "M" : "L") + position(x + p.x) + " " + position(y + p.y);
  return closed ? d + "Z" : d;
}

/// The outline of a shape about (x, y), some 11 units across.
std::string outline(Shape shape, double x, double y) {
  switch (shape) {
    case Shape::square:
      return vertices(x, y, {{-5, -5}, {5, -5}, {5, 5}, {-5, 5}}, true);
    case Shape::diamond:
      return vertices(x, y, {{0, -7}, {7, 0}, {0, 7}, {-7, 0}}, true);
    case Shape::triangle_up:
      return vertices(x, y, {{0, -7}, {6.5, 5}, {-6.5, 5}}, true);
    case Shape::triangle_down:
      return vertices(x, y, {{0, 7}, {6.5, -5}, {-6.5, -5}}, true);
    case Shape::cross:
      return vertices(x, y, {{-5, -5}, {5, 5}}, false) + vertices(x, y, {{-5, 5}, {5, -5}}, false);
    case Shape::double_up:
      return vertices(x, y, {{-6, 1}, {0, -7}, {6, 1}}, true) +
             vertices(x, y, {{-6, 8}, {0, 0}, {6, 8}}, true);
    case Shape::double_down:
      return vertices(x, y, {{-6, -1}, {0, 7}, {6, -1}}, true) +
             vertices(x, y, {{-6, -8}, {0, 0}, {6, -8}}, true);
    case Shape::star:
      return vertices(x, y, {{0, -8}, {2, -2}, {8, 0}, {2, 2}, {0, 8}, {-2, 2}, {-8, 0}, {-2, -2}}, true);
    case Shape::circle:
      break;
  }
  return "M" + position(x - 5) + " " + position(y) + "a5 5 0 1 0 10 0a5 5 0 1 0 -10 0Z";
}

}  // namespace

void ExtentOf::add(double value) {
  if (!std::isfinite(value)) return;
  low_ = any_ ? std::min(low_, value) : value;
  high_ = any_ ? std::max(high_, value) : value;
  any_ = true;
}

Extent ExtentOf::padded(double share, double least_width) const {
  const double width = high_ - low_;
  // Values that differ by less than their own rounding cannot be told apart in a drawing.
  const double least = std::max(std::max(std::abs(low_), std::abs(high_)) * 1e-9, 1e-12);
  if (width < least_width) {
    const double middle = (low_ + high_) / 2;
    return {middle - least_width / 2, middle + least_width / 2};
  }
  if (width > least) return {low_ - share * width, high_ + share * width};
  const double around = std::max(std::abs(low_) * 0.01, least * 10);
  return {low_ - around, high_ + around};
}

Plot::Plot(std::string id, FigureSize size, Extent x, Extent y, double right)
    : id_(std::move(id)), size_(size), x_(x), y_(y), right_(right) {
  if (!(x_.high > x_.low)) x_.high = x_.low + 1;
  if (!(y_.high > y_.low)) y_.high = y_.low + 1;
}

double Plot::to_x(double x) const {
  return left_ + (x - x_.low) / (x_.high - x_.low) * (size_.width - left_ - right_);
}

double Plot::to_y(double y) const {
  return size_.height - bottom_ - (y - y_.low) / (y_.high - y_.low) * (size_.height - top_ - bottom_);
}

std::string Plot::fitted_name(std::string_view name) const {
  constexpr double kCharacterWidth = 8;
  return shortened(name, static_cast<std::size_t>(size_.width / kCharacterWidth));
}

void Plot::value_axis_x(std::string_view name) {
  const double base = size_.height - bottom_;
  for (const Tick& tick : value_ticks(x_.low, x_.high, std::max(2, static_cast<int>(size_.width / 75)))) {
    axes_ += line_element(to_x(tick.at), top_, to_x(tick.at), base, "grid");
    axes_ += text_element(to_x(tick.at), base + 15, "tick middle", tick.label);
  }
  axes_ += text_element(size_.width - right_, base + 30, "axis end", fitted_name(name));
}

void Plot::time_axis_x(bool labels) {
  const double base = size_.height - bottom_;
  for (const Tick& tick : time_ticks(x_.low, x_.high, std::max(2, static_cast<int>(size_.width / 80)))) {
    axes_ += line_element(to_x(tick.at), top_, to_x(tick.at), base, "grid");
    if (labels) axes_ += text_element(to_x(tick.at), base + 15, "tick middle", tick.label);
  }
  if (labels) axes_ += text_element(size_.width - right_, base + 30, "axis end", "time, UTC");
}

void Plot::value_axis_y(std::string_view name, int wanted) {
  for (const Tick& tick : value_ticks(y_.low, y_.high, wanted)) {
    axes_ += line_element(left_, to_y(tick.at), size_.width - right_, to_y(tick.at), "grid");
    axes_ += text_element(left_ - 6, to_y(tick.at) + 4, "tick end", tick.label);
  }
  axes_ += text_element(4, 12, "axis", fitted_name(name));
}

void Plot::band(double low, double high, std::string_view css) {
  const double upper = std::max(to_y(high), top_), lower = std::min(to_y(low), size_.height - bottom_);
  clipped_ += rectangle(left_, upper, size_.width - left_ - right_, lower - upper, css);
}

void Plot::block(double from, double to, std::string_view css) {
  const double first = std::max(to_x(from), left_), last = std::min(to_x(to), size_.width - right_);
  clipped_ += rectangle(first, top_, std::max(last - first, 2.0), size_.height - top_ - bottom_, css);
}

void Plot::path(const std::string& d, std::string_view css) {
  if (!d.empty()) clipped_ += "<path" + attribute("class", css) + attribute("d", d) + "/>";
}

void Plot::line(const std::vector<PlotPoint>& points, std::string_view css) {
  std::string d;
  for (const PlotPoint& p : points)
    d += (d.empty() ? "M" : "L") + position(to_x(p.x)) + " " + position(to_y(p.y));
  path(d, css);
}

void Plot::area(const std::vector<PlotPoint>& upper, const std::vector<PlotPoint>& lower,
                std::string_view css) {
  std::string d;
  const auto add = [&](const PlotPoint& p) {
    d += (d.empty() ? "M" : "L") + position(to_x(p.x)) + " " + position(to_y(p.y));
  };
  std::for_each(upper.begin(), upper.end(), add);
  std::for_each(lower.rbegin(), lower.rend(), add);
  if (!d.empty()) path(d + "Z", css);
}

void Plot::dots(const std::vector<PlotPoint>& points, std::string_view css) {
  // A stroke of no length with round ends is a dot, at a few bytes each.
  std::string d;
  for (const PlotPoint& p : points) d += "M" + position(to_x(p.x)) + " " + position(to_y(p.y)) + "h0";
  path(d, css);
}

void Plot::bars(const std::vector<PlotPoint>& points, std::string_view css) {
  std::string d;
  for (const PlotPoint& p : points)
    d += "M" + position(to_x(p.x)) + " " + position(to_y(0)) + "V" + position(to_y(p.y));
  path(d, css);
}

void Plot::across(double y, std::string_view css, std::string_view label) {
  if (!(y >= y_.low && y <= y_.high)) return;
  clipped_ += line_element(left_, to_y(y), size_.width - right_, to_y(y), css);
  if (!label.empty()) labels_.push_back({to_y(y), std::string(label)});
}

void Plot::upright(double x, std::string_view css, std::string_view flag) {
  if (!(x >= x_.low && x <= x_.high)) return;
  clipped_ += line_element(to_x(x), top_, to_x(x), size_.height - bottom_, css);
  constexpr double kFlagRoom = 14;
  if (flag.empty() || to_x(x) - last_flag_ < kFlagRoom) return;
  last_flag_ = to_x(x);
  over_ += text_element(to_x(x), top_ - 5, std::string(css) + "-flag middle", flag);
}

void Plot::shape(Shape shape, PlotPoint at, std::string_view css, std::string_view words) {
  const double x = std::clamp(to_x(at.x), left_, size_.width - right_);
  const double y = std::clamp(to_y(at.y), top_, size_.height - bottom_);
  over_ += "<path" + attribute("class", css) + attribute("d", outline(shape, x, y)) + "><title>" +
           escaped(words) + "</title></path>";
}

void Plot::words_at(PlotPoint at, std::string_view words, std::string_view css) {
  const double x = to_x(at.x);
  const bool right_half = x > (left_ + size_.width - right_) / 2;
  const double y = std::clamp(to_y(at.y), top_ + 12, size_.height - bottom_ - 4);
  over_ +=
      text_element(right_half ? x - 11 : x + 11, y + 4, std::string(css) + (right_half ? " end" : ""), words);
}

std::string Plot::side_labels() const {
  constexpr double kLineHeight = 13;
  std::vector<SideLabel> sorted = labels_;
  std::stable_sort(sorted.begin(), sorted.end(), [](const auto& a, const auto& b) { return a.y < b.y; });
  double next = top_;
  for (SideLabel& label : sorted) {
    label.y = std::max(label.y, next);
    next = label.y + kLineHeight;
  }
  double room = size_.height - bottom_ + 4;
  std::string out;
  for (auto label = sorted.rbegin(); label != sorted.rend(); ++label) {
    label->y = std::min(label->y, room);
    room = label->y - kLineHeight;
    out += text_element(size_.width - right_ + 5, label->y + 4, "side", label->text);
  }
  return out;
}

std::string Plot::svg(std::string_view title, std::string_view description) const {
  const std::string clip = id_ + ".clip";
  const double width = size_.width - left_ - right_, height = size_.height - top_ - bottom_;
  std::string out =
      "<svg" + attribute("viewBox", "0 0 " + position(size_.width) + " " + position(size_.height)) +
      attribute("role", "img") + attribute("aria-labelledby", id_ + ".title " + id_ + ".desc") + ">";
  out += "<title" + attribute("id", id_ + ".title") + ">" + escaped(title) + "</title>";
  out += "<desc" + attribute("id", id_ + ".desc") + ">" + escaped(description) + "</desc>";
  out += "<clipPath" + attribute("id", clip) + ">" + rectangle(left_, top_, width, height, "none") +
         "</clipPath>";
  out += axes_ + rectangle(left_, top_, width, height, "frame");
  out += "<g" + attribute("clip-path", "url(#" + clip + ")") + ">" + clipped_ + "</g>";
  return out + over_ + side_labels() + "</svg>";
}

}  // namespace agreed
