#include "cli/plot.h"

#include <sys/wait.h>
#include <unistd.h>

#include <cstdio>
#include <cstdlib>
#include <filesystem>

#include "cli/grid.h"
#include "decode/exchange/streams.h"
#include "polar/error.h"

namespace frostline::cli {
namespace {

bool ends_with(const std::string& text, const std::string& end) {
  return text.size() >= end.size() && text.compare(text.size() - end.size(), end.size(), end) == 0;
}

bool on_path(const std::string& program) {
  const char* path = std::getenv("PATH");
  std::string folders = path == nullptr ? "" : path;
  folders += ':';
  std::string folder;
  for (const char c : folders) {
    if (c != ':') {
      folder += c;
      continue;
    }
    if (!folder.empty() && ::access((folder + "/" + program).c_str(), X_OK) == 0) return true;
    folder.clear();
  }
  return false;
}

// A text in gnuplot's double quotes; titles carry no escapes of their own.
std::string quoted(const std::string& text) {
  std::string out = "\"";
  for (const char c : text) {
    if (c == '"' || c == '\\') out += '\\';
    out += c;
  }
  return out + '"';
}

std::string script_for(const std::string& path, const std::string& terminal,
                       const std::vector<Diagram>& diagrams) {
  std::string script = "set terminal " + terminal + " size 900," +
                       std::to_string(480 * diagrams.size()) + " enhanced\nset output " +
                       quoted(path) + "\nset multiplot layout " + std::to_string(diagrams.size()) +
                       ",1\n";
  std::size_t block = 0;
  for (const Diagram& diagram : diagrams) {
    for (const Series& series : diagram.series) {
      script += "$data" + std::to_string(block++) + " << END\n";
      for (const auto& [x, y] : series.points) script += shortest(x) + ' ' + shortest(y) + '\n';
      script += "END\n";
    }
  }
  block = 0;
  for (const Diagram& diagram : diagrams) {
    script += "reset\nset grid lc rgb '#dddddd'\nset key outside right top noenhanced\nset title " +
              quoted(diagram.title) + "\nset xlabel " + quoted(diagram.x_label) + "\nset ylabel " +
              quoted(diagram.y_label) + '\n' + diagram.settings + "plot ";
    for (const Series& series : diagram.series) {
      script += (&series == &diagram.series.front() ? "" : ", ") + std::string("$data") +
                std::to_string(block++) + " using 1:2 with " + series.style +
                (series.title.empty() ? " notitle" : " title " + quoted(series.title));
    }
    script += '\n';
  }
  return script + "unset multiplot\n";
}

}  // namespace

void require_plot(const std::string& path) {
  if (!ends_with(path, ".svg") && !ends_with(path, ".png")) {
    throw InputError("--plot: '" + path + "' ends neither in .svg nor in .png");
  }
  if (!on_path("gnuplot")) {
    throw InputError("--plot needs gnuplot, which is not installed (Debian: gnuplot-nox)");
  }
}

void draw(const std::string& path, const std::vector<Diagram>& diagrams) {
  require_plot(path);
  // mkdtemp puts six characters of its own in the place of the X.
  std::error_code unusable;
  const std::filesystem::path temporary = std::filesystem::temp_directory_path(unusable);
  if (unusable) {
    throw InputError("cannot draw '" + path + "': no folder for temporary files (TMPDIR)");
  }
  std::string folder = (temporary / "frostline-plot-XXXXXX").string();
  if (::mkdtemp(folder.data()) == nullptr) {
    throw InputError("cannot make a folder in '" + temporary.string() + "'");
  }
  const std::string picture = folder + "/picture";
  std::string problem;
  std::FILE* pipe = ::popen("gnuplot 2>/dev/null", "w");
  if (pipe == nullptr) {
    problem = "gnuplot does not start";
  } else {
    const std::string script = script_for(
        picture, ends_with(path, ".svg") ? "svg background '#ffffff'" : "pngcairo", diagrams);
    const bool written = std::fwrite(script.data(), 1, script.size(), pipe) == script.size();
    if (::pclose(pipe) != 0 || !written) problem = "gnuplot failed";
  }
  try {
    if (!problem.empty()) throw InputError("cannot draw '" + path + "': " + problem);
    FileSink file(path);
    file.write(read_file(picture));
    file.commit();
  } catch (...) {
    std::filesystem::remove_all(folder);
    throw;
  }
  std::filesystem::remove_all(folder);
}

}  // namespace frostline::cli
