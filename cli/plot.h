// Pictures by gnuplot, as SVG or PNG.
#pragma once

#include <string>
#include <vector>

namespace frostline::cli {

// Throws InputError unless the name ends in .svg or .png and gnuplot is installed. Call it before
// long work.
void require_plot(const std::string& path);

// One curve or set of points.
struct Series {
  std::string title;  // empty: not in the key
  std::string style;  // gnuplot's "with" words: "lines", "points pt 7", "impulses", ...
  std::vector<std::pair<double, double>> points;
};

// One diagram; several stand below each other in one picture.
struct Diagram {
  std::string title;
  std::string x_label;
  std::string y_label;
  std::string settings;  // further gnuplot commands, for example "set logscale y\n"
  std::vector<Series> series;
};

// Draws the diagrams into path. The file appears whole or not at all. Throws InputError when
// gnuplot fails.
void draw(const std::string& path, const std::vector<Diagram>& diagrams);

}  // namespace frostline::cli
