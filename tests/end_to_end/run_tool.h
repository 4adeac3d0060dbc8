// Runs the outside readers of exported files: compilers, simulators, text tools.
#pragma once

#include <sys/wait.h>

#include <array>
#include <cstdio>
#include <stdexcept>
#include <string>

#include "tests/support/folder.h"

namespace frostline::testing {

struct ToolResult {
  int status = -1;
  std::string out;  // stdout and stderr
};

// A line of the shell, run in the folder.
inline ToolResult run_tool(const Folder& folder, const std::string& line) {
  const std::string command = "cd '" + folder.path() + "' && { " + line + "; } 2>&1";
  std::FILE* const pipe = ::popen(command.c_str(), "r");
  if (pipe == nullptr) throw std::runtime_error("popen");
  ToolResult result;
  std::array<char, 65536> piece{};
  while (const std::size_t got = std::fread(piece.data(), 1, piece.size(), pipe)) {
    result.out.append(piece.data(), got);
  }
  const int status = ::pclose(pipe);
  result.status = WIFEXITED(status) ? WEXITSTATUS(status) : 128;
  return result;
}

inline std::string hdl_path(const std::string& name) {
  return std::string(FROSTLINE_SOURCE_DIR) + "/tests/hdl/" + name;
}

}  // namespace frostline::testing
