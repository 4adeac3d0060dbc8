// systemverilog and vhdl: packages.
#include <algorithm>

#include "cli/export_formats.h"
#include "polar/check_bits.h"
#include "polar/digest.h"
#include "polar/error.h"
#include "polar/precoding.h"

namespace frostline::cli {
namespace {

// Bits of a literal on one line.
constexpr std::size_t kLiteralBits = 64;
// The longest vector that every SystemVerilog tool must take: IEEE 1800-2017, 6.9.1.
constexpr std::size_t kLongestVector = 65536;

// A bit string as literals of up to 64 bits, the first bit leftmost, joined by a separator.
std::string literals(const BitString& bits, bool vhdl) {
  std::string text;
  for (std::size_t first = 0; first < bits.size(); first += kLiteralBits) {
    const std::size_t count = std::min(kLiteralBits, bits.size() - first);
    const bool last = first + count == bits.size();
    const std::string digits = bits_to_hex(bits.slice(first, count));
    text += vhdl ? "    x\"" + digits + "\"" : "    " + std::to_string(count) + "'h" + digits;
    if (!last) text += vhdl ? " &" : ",";
    if (!last) text += "\n";
  }
  return text;
}

// The same in binary, for strings whose length is no multiple of 4.
std::string binary_literals(const BitString& bits, bool vhdl) {
  std::string text;
  for (std::size_t first = 0; first < bits.size(); first += kLiteralBits) {
    const std::size_t count = std::min(kLiteralBits, bits.size() - first);
    const std::string digits = bits_to_text(bits.slice(first, count));
    text += vhdl ? "    \"" + digits + "\"" : "    " + std::to_string(count) + "'b" + digits;
    if (first + count < bits.size()) text += vhdl ? " &\n" : ",\n";
  }
  return text;
}

BitString schedule_bits(const Code& code, bool adds) {
  const PrecodingSchedule schedule(code.frozen, code.precoding);
  BitString bits(code.block_length().bytes());
  for (std::size_t j = 0; j < bits.size(); ++j) {
    bits.set(j, adds ? schedule.adds_state(j) : schedule.moves_state(j));
  }
  return bits;
}

// The integer constants of both languages: name, value, what it is.
struct Constant {
  const char* name;
  std::uint64_t value;
  const char* meaning;
};

std::vector<Constant> constants(const ExportRequest& request) {
  const Design& design = request.design;
  std::vector<Constant> list = {
      {"N", design.code.block_length().bits(), "block length"},
      {"LOG2_N", design.code.block_length().log2(), "stages of the transform"},
      {"M", design.code.frozen.frozen_count(), "frozen indices, bits of the syndrome"}};
  switch (design.arithmetic.kind) {
    case Arithmetic::Kind::planes:
      list.push_back(
          {"W", design.arithmetic.planes, "magnitude bits of a message, beside its sign"});
      break;
    case Arithmetic::Kind::integer:
      list.push_back({"Q", design.arithmetic.llr_bits, "bits of a message"});
      list.push_back({"A", design.arithmetic.channel_level, "channel level"});
      break;
    case Arithmetic::Kind::exact:
      break;
  }
  list.push_back({"BIT_REVERSED", request.order == IndexOrder::bit_reversed ? 1U : 0U,
                  "1: elements are in bit-reversed order"});
  list.push_back({"STATE8", request.design.code.precoding == Precoding::state8 ? 1U : 0U,
                  "1: frozen bits are precoded"});
  list.push_back({"CHECK_BITS", design.code.check_bits, "width of the CRC over x"});
  if (design.code.check_bits > 0) {
    list.push_back(
        {"CHECK_GENERATOR", check_generator(design.code.check_bits), "without its leading term"});
  }
  return list;
}

std::vector<std::string> package_lines(const ExportRequest& request) {
  std::vector<std::string> lines = opening_lines(request.design, request.order);
  lines.push_back("The leftmost digit of a mask is element 0.");
  lines.push_back(request.array +
                  "_index: entry t is the element of u that bit t of the syndrome is.");
  if (request.design.code.precoding != Precoding::none) {
    lines.push_back("state8_adds, state8_moves: bit j for byte j of u in natural index order.");
  }
  return lines;
}

}  // namespace

void export_systemverilog(const ExportRequest& request, FileSink& out) {
  const Code& code = request.design.code;
  const std::size_t length = code.block_length().bits();
  if (length > kLongestVector) {
    throw InputError(
        "--as systemverilog: tools need not take vectors above 65536 bits; for block "
        "length " +
        std::to_string(length) + " use hex-memory");
  }
  const std::string n = std::to_string(length);
  out.write(commented(package_lines(request), "// ") + "\npackage " + request.name + "_pkg;\n");
  for (const Constant& constant : constants(request)) {
    out.write(std::string("  parameter int ") + constant.name + " = " +
              std::to_string(constant.value) + ";  // " + constant.meaning + "\n");
  }
  out.write("\n  parameter logic [0:N-1] " + request.array + "_mask = {\n" +
            literals(in_order(code.frozen.mask(), code.block_length(), request.order), false) +
            "};\n");
  const std::vector<std::size_t> elements = syndrome_elements(request);
  // The list is a vector too: older tools know no parameters that are arrays.
  if (!elements.empty() && elements.size() * code.block_length().log2() <= kLongestVector) {
    out.write("\n  // Entry t is " + request.array +
              "_index[LOG2_N*t +: LOG2_N].\n  parameter logic "
              "[0:M*LOG2_N-1] " +
              request.array + "_index = {\n");
    const std::string width = std::to_string(code.block_length().log2()) + "'d";
    for (std::size_t t = 0; t < elements.size(); ++t) {
      out.write((t % 8 == 0 ? "    " : " ") + width + std::to_string(elements[t]) +
                (t + 1 == elements.size() ? "};\n"
                 : t % 8 == 7             ? ",\n"
                                          : ","));
    }
  }
  if (code.precoding != Precoding::none) {
    out.write("\n  parameter logic [0:N/8-1] state8_adds = {\n" +
              binary_literals(schedule_bits(code, true), false) +
              "};\n  parameter logic [0:N/8-1] state8_moves = {\n" +
              binary_literals(schedule_bits(code, false), false) + "};\n");
    out.write(
        "  // Row k of Y is state8_rows[8*k +: 8], bit j of the state its bit of weight 2^j.\n"
        "  parameter logic [0:63] state8_rows = 64'h");
    out.write(to_hex({kState8Rows, 8}));
    out.write(";\n");
  }
  out.write("endpackage\n");
}

void export_vhdl(const ExportRequest& request, FileSink& out) {
  const Code& code = request.design.code;
  out.write(commented(package_lines(request), "-- ") +
            "\nlibrary ieee;\nuse ieee.std_logic_1164.all;\n\npackage " + request.name +
            "_pkg is\n");
  for (const Constant& constant : constants(request)) {
    out.write(std::string("  constant ") + constant.name + " : natural := " +
              std::to_string(constant.value) + ";  -- " + constant.meaning + "\n");
  }
  out.write("\n  constant " + request.array + "_mask : std_logic_vector(0 to N - 1) :=\n" +
            literals(in_order(code.frozen.mask(), code.block_length(), request.order), true) +
            ";\n");
  const std::vector<std::size_t> elements = syndrome_elements(request);
  if (!elements.empty()) {
    out.write("\n  type " + request.array +
              "_index_list is array (0 to M - 1) of natural;\n"
              "  constant " +
              request.array + "_index : " + request.array + "_index_list := (\n");
    for (std::size_t t = 0; t < elements.size(); ++t) {
      // A list of one entry must name it.
      out.write((t % 10 == 0 ? "    " : " ") + std::string(elements.size() == 1 ? "0 => " : "") +
                std::to_string(elements[t]) +
                (t + 1 == elements.size() ? ");\n"
                 : t % 10 == 9            ? ",\n"
                                          : ","));
    }
  }
  if (code.precoding != Precoding::none) {
    out.write("\n  constant state8_adds : std_logic_vector(0 to N / 8 - 1) :=\n" +
              binary_literals(schedule_bits(code, true), true) +
              ";\n  constant state8_moves : std_logic_vector(0 to N / 8 - 1) :=\n" +
              binary_literals(schedule_bits(code, false), true) +
              ";\n  -- Row k of Y is bits 8k to 8k + 7, the first of them of weight 2^7.\n"
              "  constant state8_rows : std_logic_vector(0 to 63) := x\"");
    out.write(to_hex({kState8Rows, 8}));
    out.write("\";\n");
  }
  out.write("end package;\n");
}

}  // namespace frostline::cli
