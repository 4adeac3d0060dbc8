// c-header: C99, constant arrays and compile-time checks, nothing but <stdint.h>.
#include <algorithm>
#include <cctype>
#include <type_traits>

#include "cli/export_formats.h"
#include "polar/check_bits.h"
#include "polar/precoding.h"

namespace frostline::cli {
namespace {

std::string upper_case(std::string text) {
  for (char& c : text) c = static_cast<char>(std::toupper(static_cast<unsigned char>(c)));
  return text;
}

// "static const TYPE NAME[COUNT] = {...};", columns numbers a line.
template <typename Container, typename Text>
void write_array(const std::string& declaration, const Container& values, std::size_t columns,
                 const Text& text, FileSink& out) {
  out.write("static const " + declaration + " = {\n");
  for (std::size_t i = 0; i < values.size(); ++i) {
    const bool last = i + 1 == values.size();
    out.write((i % columns == 0 ? "    " : " ") + text(values[i]) +
              (last                         ? "};\n"
               : i % columns == columns - 1 ? ",\n"
                                            : ","));
  }
}

std::string byte_text(std::uint8_t value) {
  constexpr const char* kDigits = "0123456789abcdef";
  return {'0', 'x', kDigits[value >> 4], kDigits[value & 15U]};
}

void write_bits(const std::string& name, const BitString& bits, FileSink& out) {
  const KeyBytes bytes = bits_to_packed(bits);
  write_array("uint8_t " + name + "[" + std::to_string(bytes.size()) + "]", bytes, 12, byte_text,
              out);
}

void write_precoding(const Code& code, const std::string& name, FileSink& out) {
  const PrecodingSchedule schedule(code.frozen, code.precoding);
  BitString adds(code.block_length().bytes());
  BitString moves(code.block_length().bytes());
  for (std::size_t j = 0; j < adds.size(); ++j) {
    adds.set(j, schedule.adds_state(j));
    moves.set(j, schedule.moves_state(j));
  }
  out.write("\n/* Precoding state8: bit 7 - j%8 of byte j/8 stands for byte j of u. */\n");
  write_bits(name + "_state8_adds", adds, out);
  write_bits(name + "_state8_moves", moves, out);
  out.write("/* Row k of Y, bit j of the state its bit of weight 2^j. */\n");
  write_array("uint8_t " + name + "_state8_rows[8]", Span<const std::uint8_t>(kState8Rows, 8), 12,
              byte_text, out);
}

}  // namespace

void export_c_header(const ExportRequest& request, FileSink& out) {
  const Code& code = request.design.code;
  const std::size_t length = code.block_length().bits();
  const std::string& name = request.name;
  const std::string macro = upper_case(name);
  const std::string mask = name + "_" + request.array + "_mask";
  const std::string index = name + "_" + request.array + "_index";
  std::vector<std::string> lines = opening_lines(request.design, request.order);
  lines.push_back("Mask: element e is bit 7 - e%8 of byte e/8.");
  lines.push_back("Index list: bit t of the syndrome is element " + index + "[t] of u.");
  out.write("/*\n" + commented(lines, " * ") + " */\n#ifndef " + macro + "_H\n#define " + macro +
            "_H\n\n#include <stdint.h>\n\n");
  const auto define = [&](const char* what, std::uint64_t value) {
    out.write("#define " + macro + "_" + what + " " + std::to_string(value) + "\n");
  };
  define("BLOCK_LENGTH", length);
  define("LOG2_BLOCK_LENGTH", code.block_length().log2());
  define("FROZEN_COUNT", code.frozen.frozen_count());
  define("BIT_REVERSED", request.order == IndexOrder::bit_reversed ? 1 : 0);
  define("STATE8", code.precoding == Precoding::state8 ? 1 : 0);
  define("CHECK_BITS", code.check_bits);
  if (code.check_bits > 0) define("CHECK_GENERATOR", check_generator(code.check_bits));
  out.write("\n");
  write_bits(mask, in_order(code.frozen.mask(), code.block_length(), request.order), out);
  const std::vector<std::size_t> elements = syndrome_elements(request);
  if (!elements.empty()) {
    out.write("\n");
    write_array((length > 65536 ? "uint32_t " : "uint16_t ") + index + "[" +
                    std::to_string(elements.size()) + "]",
                elements, 12, [](std::size_t element) { return std::to_string(element); }, out);
  }
  if (code.precoding == Precoding::state8) write_precoding(code, name, out);
  // C99 has no static assertion: an array of negative size stops the compiler.
  out.write("\n/* Checks at compile time. */\ntypedef char " + name + "_check_mask_size[sizeof(" +
            mask + ") * 8 == " + macro + "_BLOCK_LENGTH ? 1 : -1];\n");
  out.write("typedef char " + name + "_check_power_of_two[(1ul << " + macro +
            "_LOG2_BLOCK_LENGTH) == " + macro + "_BLOCK_LENGTH ? 1 : -1];\n");
  if (!elements.empty()) {
    out.write("typedef char " + name + "_check_index_count[sizeof(" + index + ") / sizeof(" +
              index + "[0]) == " + macro + "_FROZEN_COUNT ? 1 : -1];\n");
  }
  out.write("\n#endif\n");
}

}  // namespace frostline::cli
