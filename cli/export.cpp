// frostline export: a design for other tools.
#include <algorithm>
#include <iostream>

#include "cli/account.h"
#include "cli/command.h"
#include "cli/design_file.h"
#include "cli/export_formats.h"
#include "cli/grid.h"
#include "cli/options.h"
#include "polar/error.h"

namespace frostline::cli {
namespace {

struct Format {
  const char* name;
  void (*write)(const ExportRequest& request, FileSink& out);
};

constexpr Format kFormats[] = {
    {"hex-memory", export_hex_memory},
    {"systemverilog", export_systemverilog},
    {"vhdl", export_vhdl},
    {"c-header", export_c_header},
    {"csv", export_csv},
    {"packed", export_packed},
    {"schedule", export_schedule},
};

Options make_options() {
  Options options("export", "Writes a design for other tools.", {"FILE"});
  options
      .value("as", "FORMAT",
             "hex-memory ($readmemh), systemverilog or vhdl (a package), c-header (C99), csv (a "
             "line an index), packed (bytes, most significant bit first), schedule (the nodes of "
             "the pruned tree)")
      .value("output,o", "FILE", "the file to write")
      .value("index-order", "ORDER",
             "order of the elements of u: natural or bit-reversed (natural)")
      .value("word-bits", "BITS", "width of a word of hex-memory (32, or N where that is less)")
      .value("name", "NAME",
             "package NAME_pkg, and what all names of the C header begin with (frostline)")
      .value("array", "NAME", "the arrays NAME_mask and NAME_index (frozen)");
  add_hardware_options(options);
  options.computing().epilogue(
      "Examples:\n"
      "  frostline export link.design.json --as systemverilog --name link -o link_pkg.sv\n"
      "  frostline export link.design.json --as hex-memory --word-bits 64 -o link.hex\n"
      "  frostline export link.design.json --as schedule --processing-elements 128 -o link.csv\n");
  return options;
}

const Format& format_of(const std::string& name) {
  std::string known;
  for (const Format& format : kFormats) {
    if (name == format.name) return format;
    known += (known.empty() ? "" : ", ") + std::string(format.name);
  }
  throw InputError("--as: unknown format '" + name + "'; there are " + known);
}

// A name that C, SystemVerilog and VHDL all take in front of "_": letters, digits and single
// underscores, a letter first.
std::string identifier(const Options& options, const std::string& option,
                       const std::string& by_default) {
  const std::string name = options.optional_text(option).value_or(by_default);
  const auto letter = [](char c) { return (c >= 'a' && c <= 'z') || (c >= 'A' && c <= 'Z'); };
  const auto digit = [](char c) { return c >= '0' && c <= '9'; };
  const bool good = !name.empty() && name.size() <= 64 && letter(name[0]) && name.back() != '_' &&
                    name.find("__") == std::string::npos &&
                    std::all_of(name.begin(), name.end(),
                                [&](char c) { return letter(c) || digit(c) || c == '_'; });
  if (!good) {
    throw InputError("--" + option + ": '" + name +
                     "' is not a name of letters, digits and single underscores that begins with a "
                     "letter");
  }
  return name;
}

}  // namespace

std::vector<std::string> opening_lines(const Design& design, IndexOrder order) {
  const Code& code = design.code;
  const std::string n = std::to_string(code.block_length().log2());
  std::vector<std::string> lines = {
      "Frozen set of a polar code for reconciliation, by frostline.",
      "N = " + std::to_string(code.block_length().bits()) + ", QBER p = " + shortest(design.qber) +
          ", M = " + std::to_string(code.frozen.frozen_count()) + " frozen, precoding " +
          std::string(precoding_name(code.precoding)) + ", check bits " +
          std::to_string(code.check_bits) + ", made for list size " + std::to_string(design.list) +
          " in " + to_string(design.arithmetic) + ".",
      "code_sha256 " + to_hex(code_sha256(code)),
      "u = x G over GF(2), G the " + n +
          "-fold Kronecker power of [1 0; 1 1]. In a mask 1 means frozen: made public.",
      "The syndrome is the M public bits in increasing natural index."};
  if (order == IndexOrder::natural) {
    lines.push_back("Natural index order: element k is u_k.");
  } else {
    lines.push_back("Bit-reversed index order: element k is u_r(k), r(k) the " + n +
                    " bits of k read backwards.");
    lines.push_back(
        "The transform's output is meant in the same order: the same butterfly network "
        "gives it from x in bit-reversed order.");
  }
  return lines;
}

std::string commented(const std::vector<std::string>& lines, const std::string& mark) {
  std::string text;
  for (const std::string& line : lines) text += mark + line + "\n";
  return text;
}

std::vector<std::size_t> syndrome_elements(const ExportRequest& request) {
  const FrozenSet& frozen = request.design.code.frozen;
  std::vector<std::size_t> elements;
  if (frozen.block_length().bits() > kLongestIndexList) return elements;
  for (std::size_t i = 0; i < frozen.block_length().bits(); ++i) {
    if (frozen.is_frozen(i)) {
      elements.push_back(in_order(i, frozen.block_length(), request.order));
    }
  }
  return elements;
}

int run_export(const std::vector<std::string>& arguments) {
  Options options = make_options();
  if (!options.parse(arguments)) return kDone;
  const Format& format = format_of(options.text("as"));
  const std::string path = options.text("output");
  require_distinct_files({options.text("FILE")}, {path});
  const Design design = read_design(options.text("FILE"));
  const std::size_t length = design.code.block_length().bits();
  ExportRequest request{
      design,
      parse_index_order(options.optional_text("index-order").value_or("natural")),
      static_cast<std::size_t>(
          options.optional_whole("word-bits").value_or(std::min<std::size_t>(32, length))),
      identifier(options, "name", "frostline"),
      identifier(options, "array", "frozen"),
      hardware_choice(options, design)};
  if (options.has("word-bits") && std::string(format.name) != "hex-memory") {
    throw InputError("--word-bits is for --as hex-memory");
  }
  FileSink out(path);
  format.write(request, out);
  out.commit();
  if (options.json()) {
    Json root;
    root["file"] = path;
    root["as"] = format.name;
    root["block_length"] = length;
    root["frozen_count"] = design.code.frozen.frozen_count();
    root["index_order"] = index_order_name(request.order);
    root["code_sha256"] = to_hex(code_sha256(design.code));
    std::cout << root.dump(2) << '\n';
  } else if (!options.quiet()) {
    options.account() << "Frozen set of " << grouped(length) << " indices, "
                      << grouped(design.code.frozen.frozen_count())
                      << " of them frozen, written to " << path << " as " << format.name << " in "
                      << index_order_name(request.order) << " index order.\n";
  }
  return kDone;
}

}  // namespace frostline::cli
