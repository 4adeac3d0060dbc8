// The files that `export` writes, one function a format. Layouts: designs/FORMATS.md, "Exports".
#pragma once

#include <string>
#include <vector>

#include "cli/hardware_account.h"
#include "decode/exchange/streams.h"
#include "decode/hardware/index_order.h"
#include "polar/design.h"

namespace frostline::cli {

struct ExportRequest {
  const Design& design;
  IndexOrder order = IndexOrder::natural;
  std::size_t word_bits = 0;  // of hex-memory: divides N
  std::string name;           // of packages, and in front of all names in C
  std::string array;          // in front of _mask and _index
  HardwareChoice hardware;    // of schedule
};

void export_hex_memory(const ExportRequest& request, FileSink& out);
void export_packed(const ExportRequest& request, FileSink& out);
void export_systemverilog(const ExportRequest& request, FileSink& out);
void export_vhdl(const ExportRequest& request, FileSink& out);
void export_c_header(const ExportRequest& request, FileSink& out);
void export_csv(const ExportRequest& request, FileSink& out);
void export_schedule(const ExportRequest& request, FileSink& out);

// What every file opens with, line by line and without comment marks: N, p, M, the conventions, the
// digest of the code.
std::vector<std::string> opening_lines(const Design& design, IndexOrder order);

// Each line behind a mark ("// ").
std::string commented(const std::vector<std::string>& lines, const std::string& mark);

// The syndrome's index list: entry t is the element of u at which bit t of the syndrome stands.
// Bits are in increasing natural index whatever the order of elements.
std::vector<std::size_t> syndrome_elements(const ExportRequest& request);

// Index lists up to this block length are written into packages and headers.
constexpr std::size_t kLongestIndexList = std::size_t{1} << 16;

}  // namespace frostline::cli
