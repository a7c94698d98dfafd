#pragma once
// A small drawing of data as SVG text: axes, lines, dots, bands, marks. Appearance comes from classes and the
// style sheet; the drawing holds no colour, no style attribute and no script.
#include <string>
#include <string_view>
#include <vector>

namespace agreed {

struct FigureSize {
  double width = 360, height = 210;  ///< in units of the drawing; text is about 13 of them high
};

/// low < high.
struct Extent {
  double low = 0, high = 1;
};

/// Grows to hold values, then gives an extent with a margin; of one single value a small one around it.
class ExtentOf {
 public:
  void add(double value);  ///< values that are not finite are ignored
  [[nodiscard]] bool empty() const { return !any_; }
  /// At least `least` wide; without it, of one value some hundredths of it.
  [[nodiscard]] Extent padded(double share, double least = 0) const;

 private:
  bool any_ = false;
  double low_ = 0, high_ = 0;
};

struct PlotPoint {
  double x = 0, y = 0;
};

enum class Shape { circle, square, diamond, triangle_up, triangle_down, cross, double_up, double_down, star };

class Plot {
 public:
  /// `id` must be unique in the page and fit for an id attribute; `right` is the room for line labels.
  Plot(std::string id, FigureSize size, Extent x, Extent y, double right = 62);

  void value_axis_x(std::string_view name);
  void time_axis_x(bool labels = true);
  void value_axis_y(std::string_view name, int wanted = 5);

  void band(double low, double high, std::string_view css);  ///< across, between two y
  void block(double from, double to, std::string_view css);  ///< upright, between two x
  void line(const std::vector<PlotPoint>& points, std::string_view css);
  /// The area between two lines that share their x.
  void area(const std::vector<PlotPoint>& upper, const std::vector<PlotPoint>& lower, std::string_view css);
  void dots(const std::vector<PlotPoint>& points, std::string_view css);
  void bars(const std::vector<PlotPoint>& points, std::string_view css);  ///< upright strokes from y = 0
  void across(double y, std::string_view css,
              std::string_view label = {});  ///< label stands in the right margin
  void upright(double x, std::string_view css, std::string_view flag = {});  ///< flag stands above the frame
  void shape(Shape shape, PlotPoint at, std::string_view css, std::string_view words);
  void words_at(PlotPoint at, std::string_view words, std::string_view css);

  [[nodiscard]] double to_x(double x) const;  ///< position in the drawing
  [[nodiscard]] double to_y(double y) const;

  /// The whole <svg>: an image named `title` and described by `description`.
  [[nodiscard]] std::string svg(std::string_view title, std::string_view description) const;

 private:
  struct SideLabel {
    double y = 0;
    std::string text;
  };
  void path(const std::string& d, std::string_view css);
  [[nodiscard]] std::string side_labels() const;
  [[nodiscard]] std::string fitted_name(std::string_view name) const;

  std::string id_;
  FigureSize size_;
  Extent x_, y_;
  double left_ = 50, right_, top_ = 20, bottom_ = 34;
  std::string axes_, clipped_, over_;
  std::vector<SideLabel> labels_;
  double last_flag_ = -1e9;
};

}  // namespace agreed
