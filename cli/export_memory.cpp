// hex-memory and packed: the mask as bits and nothing else.
#include "cli/export_formats.h"
#include "polar/error.h"

namespace frostline::cli {

void export_hex_memory(const ExportRequest& request, FileSink& out) {
  const std::size_t length = request.design.code.block_length().bits();
  const std::size_t width = request.word_bits;
  if (width == 0 || length % width != 0) {
    throw InputError("--word-bits: " + std::to_string(width) +
                     " does not divide the block length " + std::to_string(length));
  }
  std::vector<std::string> lines = opening_lines(request.design, request.order);
  lines.push_back("Text for $readmemh (IEEE 1364, IEEE 1800): " + std::to_string(length / width) +
                  " words of " + std::to_string(width) + " bits, a word a line.");
  lines.push_back("Word w holds elements " + std::to_string(width) + " w to " +
                  std::to_string(width) + " w + " + std::to_string(width - 1) +
                  ", the first of them in its most significant bit:");
  lines.push_back("reg [0:" + std::to_string(width - 1) +
                  "] mask [0:" + std::to_string(length / width - 1) + "]; element e is mask[e / " +
                  std::to_string(width) + "][e % " + std::to_string(width) + "].");
  out.write(commented(lines, "// "));
  const BitString mask = in_order(request.design.code.frozen.mask(),
                                  request.design.code.block_length(), request.order);
  for (std::size_t first = 0; first < length; first += width) {
    // Words of less than a digit stand at its low end.
    BitString word(width < 4 ? 4 - width : 0);
    word.append(mask.slice(first, width));
    out.write(bits_to_hex(word) + "\n");
  }
}

void export_packed(const ExportRequest& request, FileSink& out) {
  out.write(bits_to_packed(in_order(request.design.code.frozen.mask(),
                                    request.design.code.block_length(), request.order)));
}

}  // namespace frostline::cli
