#include "tests/end_to_end/run_command.h"

#include <fcntl.h>
#include <poll.h>
#include <signal.h>
#include <spawn.h>
#include <sys/wait.h>
#include <unistd.h>

#include <array>
#include <cerrno>
#include <system_error>

extern char** environ;

namespace frostline::testing {
namespace {

void require(bool good, const char* what, int error = errno) {
  if (!good) throw std::system_error(error, std::generic_category(), what);
}

// A pipe whose ends a child does not inherit unless it is told to.
std::array<int, 2> make_pipe() {
  std::array<int, 2> ends{};
  require(::pipe2(ends.data(), O_CLOEXEC) == 0, "pipe2");
  return ends;
}

// Appends what is there. False at the end of the stream.
bool take(int descriptor, std::string& text) {
  std::array<char, 65536> piece{};
  const ssize_t got = ::read(descriptor, piece.data(), piece.size());
  if (got < 0 && errno == EINTR) return true;
  require(got >= 0, "read");
  text.append(piece.data(), static_cast<std::size_t>(got));
  return got > 0;
}

}  // namespace

Arguments operator+(Arguments a, const Arguments& b) {
  a.insert(a.end(), b.begin(), b.end());
  return a;
}

RunningCommand::RunningCommand(const Folder& folder, const Arguments& arguments,
                               const std::string& stdout_name) {
  const std::array<int, 2> err = make_pipe();
  std::array<int, 2> out{-1, -1};
  if (stdout_name.empty()) {
    out = make_pipe();
  } else {
    out[1] =
        ::open(folder.path(stdout_name).c_str(), O_WRONLY | O_CREAT | O_TRUNC | O_CLOEXEC, 0666);
    require(out[1] >= 0, "open");
  }
  posix_spawn_file_actions_t actions;
  posix_spawn_file_actions_init(&actions);
  posix_spawn_file_actions_addopen(&actions, STDIN_FILENO, "/dev/null", O_RDONLY, 0);
  posix_spawn_file_actions_adddup2(&actions, out[1], STDOUT_FILENO);
  posix_spawn_file_actions_adddup2(&actions, err[1], STDERR_FILENO);
  posix_spawn_file_actions_addchdir_np(&actions, folder.path().c_str());

  std::vector<std::string> words = Arguments{FROSTLINE_COMMAND} + arguments;
  std::vector<char*> pointers;
  for (std::string& word : words) pointers.push_back(word.data());
  pointers.push_back(nullptr);
  const int error =
      ::posix_spawn(&process_, FROSTLINE_COMMAND, &actions, nullptr, pointers.data(), environ);
  posix_spawn_file_actions_destroy(&actions);
  ::close(out[1]);
  ::close(err[1]);
  out_ = out[0];
  err_ = err[0];
  require(error == 0, "posix_spawn", error);
}

RunningCommand::~RunningCommand() {
  if (process_ > 0) {
    ::kill(process_, SIGKILL);
    ::waitpid(process_, nullptr, 0);
  }
  if (out_ >= 0) ::close(out_);
  if (err_ >= 0) ::close(err_);
}

void RunningCommand::send(int signal) const { require(::kill(process_, signal) == 0, "kill"); }

void RunningCommand::close_stdout() {
  ::close(out_);
  out_ = -1;
}

CommandResult RunningCommand::finish() {
  CommandResult result;
  while (out_ >= 0 || err_ >= 0) {
    // poll() leaves out entries with a negative descriptor.
    std::array<pollfd, 2> streams{pollfd{out_, POLLIN, 0}, pollfd{err_, POLLIN, 0}};
    if (::poll(streams.data(), streams.size(), -1) < 0 && errno == EINTR) continue;
    if (streams[0].revents != 0 && !take(out_, result.out)) {
      ::close(out_);
      out_ = -1;
    }
    if (streams[1].revents != 0 && !take(err_, result.err)) {
      ::close(err_);
      err_ = -1;
    }
  }
  int status = 0;
  require(::waitpid(process_, &status, 0) == process_, "waitpid");
  process_ = -1;
  result.status = WIFSIGNALED(status) ? 128 + WTERMSIG(status) : WEXITSTATUS(status);
  return result;
}

CommandResult run_command(const Folder& folder, const Arguments& arguments,
                          const std::string& stdout_name) {
  return RunningCommand(folder, arguments, stdout_name).finish();
}

}  // namespace frostline::testing
