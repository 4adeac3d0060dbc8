// What a command of frostline is: a name, a line for the overview, and a function.
#pragma once

#include <string>
#include <vector>

namespace frostline::cli {

// Exit status of the program.
constexpr int kDone = 0;
constexpr int kNotAsAsked = 1;  // done, but not what was asked
constexpr int kBadInput = 2;
constexpr int kInterrupted = 130;

struct Command {
  const char* name;
  const char* summary;
  // arguments: what follows the command's name. Returns the exit status; throws InputError and
  // Interrupted.
  int (*run)(const std::vector<std::string>& arguments);
};

int run_design(const std::vector<std::string>& arguments);
int run_batch(const std::vector<std::string>& arguments);
int run_inspect(const std::vector<std::string>& arguments);
int run_limits(const std::vector<std::string>& arguments);
int run_sample(const std::vector<std::string>& arguments);
int run_syndrome(const std::vector<std::string>& arguments);
int run_reconcile(const std::vector<std::string>& arguments);
int run_trial(const std::vector<std::string>& arguments);
int run_settle(const std::vector<std::string>& arguments);
int run_export(const std::vector<std::string>& arguments);
int run_vectors(const std::vector<std::string>& arguments);
int run_confirm(const std::vector<std::string>& arguments);

}  // namespace frostline::cli
