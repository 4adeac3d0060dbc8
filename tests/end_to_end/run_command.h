// Runs the command as a user does, in a folder of its own.
//
// No shell in between: arguments reach the program as they stand, and its exit status is its own.
#pragma once

#include <sys/types.h>

#include <string>
#include <vector>

#include "tests/support/folder.h"

namespace frostline::testing {

using Arguments = std::vector<std::string>;

// a, then b.
Arguments operator+(Arguments a, const Arguments& b);

struct CommandResult {
  int status = -1;  // exit status; 128 + number of the signal that ended it
  std::string out;
  std::string err;
};

// The command while it runs: stdout and stderr are pipes.
class RunningCommand {
 public:
  // stdout_name: a file of the folder that takes stdout in place of the pipe.
  RunningCommand(const Folder& folder, const Arguments& arguments,
                 const std::string& stdout_name = "");
  ~RunningCommand();
  RunningCommand(const RunningCommand&) = delete;
  RunningCommand& operator=(const RunningCommand&) = delete;

  void send(int signal) const;
  // Closes the reading end of the command's stdout, as `head` does when it has seen enough.
  void close_stdout();
  // Reads both streams to their end and waits.
  CommandResult finish();

 private:
  pid_t process_ = -1;
  int out_ = -1;
  int err_ = -1;
};

CommandResult run_command(const Folder& folder, const Arguments& arguments,
                          const std::string& stdout_name = "");

}  // namespace frostline::testing
