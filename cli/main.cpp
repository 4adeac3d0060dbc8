// frostline COMMAND [options]: finds the command, and turns exceptions into one line and a status.
#include <malloc.h>
#include <sodium.h>

#include <algorithm>
#include <csignal>
#include <cstdlib>
#include <iostream>
#include <new>

#include "cli/command.h"
#include "polar/error.h"
#include "polar/simd.h"

namespace frostline::cli {
namespace {

constexpr Command kCommands[] = {
    {"design", "choose a frozen set and write the design file", run_design},
    {"batch", "choose frozen sets over a grid, resumable; and select among them", run_batch},
    {"inspect", "check a design file and describe it", run_inspect},
    {"limits", "what no one-way code can beat at a block length, QBER and FER", run_limits},
    {"export", "write a design for hardware, firmware and scripts", run_export},
    {"vectors", "make golden test vectors for hardware, and check answers against them",
     run_vectors},
    {"sample", "make a pair of strings that differ with a given QBER, for demos and tests",
     run_sample},
    {"trial", "run a design against random errors and count the blocks that fail", run_trial},
    {"syndrome", "sender: key in, message out", run_syndrome},
    {"reconcile", "receiver: key and message in, provisional key and receipt out", run_reconcile},
    {"settle", "sender: check the receipt's tags, write the settled key and the verdict",
     run_settle},
    {"confirm", "receiver: apply the verdict; both ends then hold the same bits", run_confirm},
};

void print_overview(std::ostream& out) {
  out << "frostline COMMAND [options]: polar-code information reconciliation\n\n";
  for (const Command& command : kCommands) {
    out << "  " << command.name << std::string(12 - std::string(command.name).size(), ' ')
        << command.summary << '\n';
  }
  out << "\n'frostline COMMAND --help' tells the options of a command and shows an example.\n"
         "'frostline --version' tells the version and the vector instructions in use.\n\n"
         "This is no certified security module. The classical channel must be authenticated, and\n"
         "every leaked bit must reach privacy amplification. Certification and the operator's own\n"
         "rules come first.\n";
}

// Batches come and go by the thousand, megabytes each. Left to itself the C library gives every
// freed one back to the system and has its pages zeroed again, which takes longer than the work.
void keep_freed_memory() {
  constexpr int kMegabyte = 1 << 20;
  ::mallopt(M_MMAP_THRESHOLD, 32 * kMegabyte);
  ::mallopt(M_TRIM_THRESHOLD, 1024 * kMegabyte);
}

// Names of files may hold anything.
std::string one_line(std::string text) {
  std::replace(text.begin(), text.end(), '\n', ' ');
  return text;
}

int run(const std::vector<std::string>& arguments) {
  if (arguments.empty()) {
    print_overview(std::cerr);
    return kBadInput;
  }
  if (arguments[0] == "--help" || arguments[0] == "-h" || arguments[0] == "help") {
    print_overview(std::cout);
    return kDone;
  }
  if (const char* name = std::getenv("FROSTLINE_SIMD"); name != nullptr && *name != '\0') {
    force_simd(name);
  }
  if (arguments[0] == "--version") {
    std::cout << "frostline " << FROSTLINE_VERSION << ", vector instructions " << simd_in_use()
              << '\n';
    return kDone;
  }
  const auto* command =
      std::find_if(std::begin(kCommands), std::end(kCommands),
                   [&](const Command& known) { return arguments[0] == known.name; });
  if (command == std::end(kCommands)) {
    throw InputError("unknown command '" + arguments[0] + "'; 'frostline --help' lists them");
  }
  const int status = command->run({arguments.begin() + 1, arguments.end()});
  std::cout.flush();
  if (!std::cout) throw InputError("cannot write to standard output");
  return status;
}

}  // namespace
}  // namespace frostline::cli

int main(int argc, char** argv) {
  using namespace frostline;
  // A closed pipe is an error of that output, and no reason to leave temporary files behind.
  std::signal(SIGPIPE, SIG_IGN);
  try {
    cli::keep_freed_memory();
    if (sodium_init() < 0) throw InputError("libsodium does not start on this machine");
    return cli::run({argv + 1, argv + argc});
  } catch (const Interrupted&) {
    std::cerr << "frostline: interrupted\n";
    return cli::kInterrupted;
  } catch (const InputError& error) {
    std::cerr << "frostline: " << cli::one_line(error.what()) << '\n';
  } catch (const std::bad_alloc&) {
    std::cerr << "frostline: not enough memory for this block length and number of threads\n";
  } catch (const std::exception& error) {
    std::cerr << "frostline: unexpected: " << error.what() << '\n';
  }
  return cli::kBadInput;
}
