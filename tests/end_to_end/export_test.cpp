// Every exported file, read back by a reader that this project has not written, shows the design's
// mask: Icarus Verilog (IEEE 1364, 1800), GHDL (IEEE 1076), a C99 compiler, od and awk.
#include <gtest/gtest.h>

#include <algorithm>
#include <sstream>

#include "decode/hardware/index_order.h"
#include "polar/design.h"
#include "polar/design_json.h"
#include "polar/random.h"
#include "polar/syndrome.h"
#include "tests/end_to_end/run_command.h"
#include "tests/end_to_end/run_tool.h"

namespace frostline::testing {
namespace {

void must(const Folder& folder, const Arguments& arguments) {
  const CommandResult result = run_command(folder, arguments);
  ASSERT_EQ(result.status, 0) << arguments[0] << ": " << result.err;
}

// A mask without any structure that a wrong order could hide behind.
BitString random_mask(std::size_t length) {
  BitString mask(length);
  RandomStream(length, "export test", 0).bernoulli(0.4, length, mask.words());
  mask.set(1, true);
  mask.set(length - 2, false);
  return mask;
}

struct ExportCase {
  unsigned log2;
  IndexOrder order;
};

class Export : public ::testing::TestWithParam<ExportCase> {
 protected:
  void SetUp() override {
    folder_.write("mask.txt", bits_to_text(mask_));
    must(folder_, {"design", "--block-length", std::to_string(length_.bits()), "--qber", "0.05",
                   "--mask", "mask.txt", "--mask-format", "text", "-o", "d.json", "--quiet"});
    for (std::size_t i = 0; i < length_.bits(); ++i) {
      if (mask_[i]) list_ += std::to_string(in_order(i, length_, GetParam().order)) + " ";
    }
  }
  void write_export(const std::string& format, const std::string& name,
                    const Arguments& more = {}) const {
    must(folder_,
         Arguments{"export", "d.json", "--as", format, "--index-order",
                   std::string(index_order_name(GetParam().order)), "-o", name, "--quiet"} +
             more);
  }
  std::string run(const std::string& line) const {
    const ToolResult result = run_tool(folder_, line);
    EXPECT_EQ(result.status, 0) << line << '\n' << result.out.substr(0, 2000);
    return result.out;
  }
  // What the readers of packages print.
  std::string told(bool with_list) const {
    return std::to_string(length_.bits()) + " " + std::to_string(mask_.count()) + " " +
           (GetParam().order == IndexOrder::natural ? "0" : "1") + "\n" + elements_ + "\n" +
           (with_list ? list_ + "\n" : "");
  }

  BlockLength length_ = BlockLength::from_log2(GetParam().log2);
  BitString mask_ = random_mask(length_.bits());
  std::string elements_ = bits_to_text(in_order(mask_, length_, GetParam().order));
  std::string list_;  // the syndrome's elements
  Folder folder_;
};

TEST_P(Export, HexMemoryIsWhatReadmemhReads) {
  for (const std::size_t width : {std::size_t{1}, std::size_t{8}, length_.bits()}) {
    write_export("hex-memory", "m.hex", {"--word-bits", std::to_string(width)});
    EXPECT_EQ(
        run("iverilog -DN=" + std::to_string(length_.bits()) + " -DWIDTH=" + std::to_string(width) +
            " -o memory " + hdl_path("read_memory.v") + " && vvp -n memory +file=m.hex"),
        elements_ + "\n");
  }
}

TEST_P(Export, SystemVerilogPackageIsReadByIcarus) {
  write_export("systemverilog", "p.sv");
  const bool with_list = length_.bits() <= 4096;
  EXPECT_EQ(run("iverilog -g2012 " + std::string(with_list ? "-DINDEX " : "") + "-o package p.sv " +
                hdl_path("read_package.sv") + " && vvp -n package"),
            told(with_list));
}

TEST_P(Export, VhdlPackageIsReadByGhdl) {
  write_export("vhdl", "p.vhd");
  EXPECT_EQ(run("ghdl -a --std=08 p.vhd && ghdl -a --std=08 " + hdl_path("read_package.vhd") +
                " && ghdl -e --std=08 read_package && ghdl -r --std=08 read_package"),
            told(true));
}

TEST_P(Export, CHeaderIsReadByAStrictC99Compiler) {
  write_export("c-header", "frostline.h");
  EXPECT_EQ(run("cc -std=c99 -Wall -Wextra -Werror -pedantic -I. " + hdl_path("read_header.c") +
                " -o header && ./header"),
            told(true));
}

TEST_P(Export, PackedIsReadByOd) {
  write_export("packed", "p.bin");
  std::istringstream bytes(run("od -An -v -tu1 -w1 p.bin"));
  std::string bits;
  for (unsigned byte = 0; bytes >> byte;) {
    for (int bit = 7; bit >= 0; --bit) bits += (byte >> bit & 1U) != 0 ? '1' : '0';
  }
  EXPECT_EQ(bits, elements_);
}

TEST_P(Export, CsvIsReadByAwk) {
  write_export("csv", "t.csv");
  const std::string columns = run(
      "awk -F, '/^#/ { next } !head { head = $0; next } { printf \"%s\", $2 } END { print \"\"; "
      "print head }' t.csv");
  EXPECT_EQ(columns, elements_ + "\nindex,frozen,rank,log10_error_probability,shows\n");
  // Ranks are a permutation, the most likely to fail first.
  EXPECT_EQ(run("awk -F, '!/^#/ && $1 != \"index\" { print $3, $4 }' t.csv | sort -n | awk '{ if "
                "($1 != NR - 1 || (NR > 1 && $2 > last + 1e-6)) bad = 1; last = $2 } END { print "
                "NR, bad + 0 }'"),
            std::to_string(length_.bits()) + " 0\n");
}

TEST_P(Export, ScheduleCoversTheMaskWithItsTypes) {
  write_export("schedule", "s.csv");
  std::istringstream rows(run("grep -v '^#' s.csv | tail -n +2 | tr ',' ' '"));
  std::string bits(length_.bits(), '?');
  std::string type;
  for (std::size_t step = 0, level = 0, offset = 0, stride = 0, count = 0, cycles = 0;
       rows >> step >> type >> level >> offset >> stride >> count >> cycles;) {
    ASSERT_EQ(count, std::size_t{1} << level);
    if (type == "mixed") continue;
    for (std::size_t j = 0; j < count; ++j) {
      // The j-th element of the node in memory; its index within the node decides.
      const std::size_t element = offset + j * stride;
      const std::size_t within = in_order(element, length_, GetParam().order) & (count - 1);
      ASSERT_EQ(bits[element], '?');
      bits[element] = type == "all-frozen"                         ? '1'
                      : type == "all-open"                         ? '0'
                      : type == "repetition" && within + 1 < count ? '1'
                      : type == "parity" && within == 0            ? '1'
                                                                   : '0';
    }
  }
  EXPECT_EQ(bits, elements_);
}

TEST_P(Export, EveryTextOpensWithWhatItIs) {
  for (const auto& [format, mark] :
       std::vector<std::pair<std::string, std::string>>{{"hex-memory", "// "},
                                                        {"systemverilog", "// "},
                                                        {"vhdl", "-- "},
                                                        {"c-header", "/*\n"},
                                                        {"csv", "# "},
                                                        {"schedule", "# "}}) {
    write_export(format, "text");
    const std::string text = folder_.read("text");
    EXPECT_EQ(text.rfind(mark, 0), 0U) << format;
    for (const std::string& part :
         {"N = " + std::to_string(length_.bits()), std::string("QBER p = 0.05"),
          "M = " + std::to_string(mask_.count()), std::string("code_sha256 "),
          std::string("u = x G over GF(2)"),
          std::string(GetParam().order == IndexOrder::natural ? "Natural" : "Bit-reversed")}) {
      EXPECT_NE(text.substr(0, 1500).find(part), std::string::npos) << format << ' ' << part;
    }
  }
}

INSTANTIATE_TEST_SUITE_P(
    Sizes, Export,
    ::testing::Values(ExportCase{3, IndexOrder::natural}, ExportCase{3, IndexOrder::bit_reversed},
                      ExportCase{5, IndexOrder::natural}, ExportCase{10, IndexOrder::bit_reversed},
                      ExportCase{16, IndexOrder::natural},
                      ExportCase{16, IndexOrder::bit_reversed}),
    [](const auto& each) {
      return "N" + std::to_string(1U << each.param.log2) +
             (each.param.order == IndexOrder::natural ? "natural" : "reversed");
    });

// The syndrome of firmware that knows nothing but the header is the library's.
TEST(ExportedHeader, GivesFirmwareTheSyndrome) {
  const Folder folder;
  for (const std::string precoding : {"none", "state8"}) {
    must(folder, {"design", "--block-length", "256", "--qber", "0.05", "--frozen", "120",
                  "--precoding", precoding, "--list", "4", "-o", "d.json", "--quiet"});
    const Design design = design_from_json(folder.read("d.json"), "d.json");
    for (const std::string order : {"natural", "bit-reversed"}) {
      must(folder, {"export", "d.json", "--as", "c-header", "--index-order", order, "-o",
                    "frostline.h", "--quiet"});
      ASSERT_EQ(run_tool(folder, "cc -std=c99 -Wall -Wextra -Werror -pedantic -I. " +
                                     hdl_path("firmware_syndrome.c") + " -o firmware")
                    .out,
                "");
      for (unsigned k = 0; k < 4; ++k) {
        BitString key(256);
        RandomStream(k, "export test", 1).bernoulli(0.5, 256, key.words());
        folder.write("key", bits_to_text(key));
        EXPECT_EQ(
            run_tool(folder, "./firmware < key").out,
            bits_to_text(SyndromeFormer(design.code.frozen, design.code.precoding).syndrome(key)) +
                "\n")
            << precoding << ' ' << order;
      }
    }
  }
}

// The model's figures of inspect are those of the formulas (tests/outside/hardware_cost_test.cpp),
// and the rows of a schedule add up to them.
TEST(ExportedSchedule, AddsUpToWhatInspectTells) {
  const Folder folder;
  must(folder, {"design", "--block-length", "1024", "--qber", "0.05", "--fer", "0.1", "--list", "4",
                "-o", "d.json", "--quiet"});
  for (const std::string elements : {"8", "64"}) {
    const Arguments setup = {"--processing-elements", elements};
    const CommandResult inspect =
        run_command(folder, Arguments{"inspect", "d.json", "--json", "--clock-mhz", "100"} + setup);
    ASSERT_EQ(inspect.status, 0) << inspect.err;
    const Json hardware = Json::parse(inspect.out)["hardware"];
    const auto open = 1024 - Json::parse(folder.read("d.json"))["frozen_count"].get<unsigned>();
    EXPECT_EQ(hardware["plain"]["cycles"], (elements == "64" ? 2080U : 2688U) + open);
    EXPECT_EQ(hardware["memory_bits"]["internal_llr"], 4U * 1023 * 4);
    EXPECT_EQ(hardware["comparators"], 28);
    const double cycles = hardware["pruned"]["cycles"].get<double>();
    EXPECT_DOUBLE_EQ(hardware["pruned"]["latency_us"].get<double>(), cycles / 100);
    must(folder,
         Arguments{"export", "d.json", "--as", "schedule", "-o", "s.csv", "--quiet"} + setup);
    EXPECT_EQ(run_tool(folder, "awk -F, '!/^#/ { sum += $7 } END { print sum }' s.csv").out,
              hardware["pruned"]["cycles"].dump() + "\n");
    unsigned visited = 0;
    for (const auto& sizes : hardware["nodes"]) {
      for (const auto& count : sizes) visited += count.get<unsigned>();
    }
    EXPECT_EQ(run_tool(folder, "grep -v '^#' s.csv | tail -n +2 | wc -l").out,
              std::to_string(visited) + "\n");
  }
}

// Names are the user's, and one frozen index is a list too.
TEST(ExportedNames, AreTheUsers) {
  const Folder folder;
  folder.write("mask", "00010000");
  must(folder, {"design", "--block-length", "8", "--qber", "0.05", "--mask", "mask",
                "--mask-format", "text", "-o", "d.json", "--quiet"});
  const Arguments names = {"--name", "hall_a", "--array", "fixed", "--quiet", "-o"};
  must(folder, Arguments{"export", "d.json", "--as", "systemverilog"} + names + Arguments{"p.sv"});
  must(folder, Arguments{"export", "d.json", "--as", "vhdl"} + names + Arguments{"p.vhd"});
  must(folder, Arguments{"export", "d.json", "--as", "c-header"} + names + Arguments{"p.h"});
  folder.write("t.sv",
               "module t; initial $display(\"%b %0d\", hall_a_pkg::fixed_mask, "
               "hall_a_pkg::fixed_index); endmodule\n");
  EXPECT_EQ(run_tool(folder, "iverilog -g2012 -o t p.sv t.sv && vvp -n t").out, "00010000 3\n");
  EXPECT_EQ(run_tool(folder, "ghdl -a --std=93 p.vhd").out, "");
  folder.write("t.c",
               "#include \"p.h\"\nint main(void) { return hall_a_fixed_index[0] == 3 && "
               "hall_a_fixed_mask[0] == 0x10 ? 0 : 1; }\n");
  EXPECT_EQ(run_tool(folder, "cc -std=c99 -Wall -Werror -pedantic t.c -o c && ./c").status, 0);
}

}  // namespace
}  // namespace frostline::testing
