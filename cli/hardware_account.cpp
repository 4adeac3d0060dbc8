#include "cli/hardware_account.h"

#include "cli/account.h"
#include "cli/grid.h"
#include "decode/hardware/message_dump.h"
#include "polar/error.h"

namespace frostline::cli {
namespace {

constexpr std::uint64_t kLargestProcessingElements = std::uint64_t{1} << 23;

unsigned whole_in(const Options& options, const std::string& name, std::uint64_t low,
                  std::uint64_t high, unsigned by_default) {
  const std::uint64_t value = options.optional_whole(name).value_or(by_default);
  if (value < low || value > high) {
    throw InputError("--" + name + ": " + std::to_string(value) + " is not from " +
                     std::to_string(low) + " to " + std::to_string(high));
  }
  return static_cast<unsigned>(value);
}

// "37: 20 of 4, 12 of 8": largest nodes last.
std::string sizes_text(const std::map<unsigned, std::size_t>& levels) {
  std::string sizes;
  std::size_t total = 0;
  for (const auto& [level, count] : levels) {
    total += count;
    sizes +=
        (sizes.empty() ? "" : ", ") + grouped(count) + " of " + grouped(std::uint64_t{1} << level);
  }
  return grouped(total) + ": " + sizes;
}

std::string time_text(BlockLength block_length, std::uint64_t cycles,
                      const std::optional<double>& clock_mhz) {
  std::string text = grouped(cycles) + " cycles";
  if (clock_mhz) {
    text += ", " + short_number(latency_us(cycles, *clock_mhz)) + " us, " +
            fixed(throughput_mbit_s(block_length, cycles, *clock_mhz), 1) + " Mbit/s";
  }
  return text;
}

Json time_json(BlockLength block_length, std::uint64_t cycles,
               const std::optional<double>& clock_mhz) {
  Json object;
  object["cycles"] = cycles;
  object["latency_us"] = clock_mhz ? Json(latency_us(cycles, *clock_mhz)) : Json(nullptr);
  object["throughput_mbit_s"] =
      clock_mhz ? Json(throughput_mbit_s(block_length, cycles, *clock_mhz)) : Json(nullptr);
  return object;
}

const char* sorter_name(Sorter sorter) { return sorter == Sorter::full ? "full" : "pruned"; }

}  // namespace

void add_hardware_options(Options& options) {
  options.value("clock-mhz", "F", "clock of the hardware model: adds latency and throughput")
      .value("processing-elements", "P", "positions of f or g a cycle, of each path (64)")
      .value("llr-bits", "Q", "bits of a message below the root (as the design's arithmetic)")
      .value("sorter", "NAME", "of path metrics: full or pruned (full)");
}

// Exact messages are not stored: 6 bits are what hardware takes for them.
unsigned message_bits(const Arithmetic& arithmetic) {
  return arithmetic.kind == Arithmetic::Kind::exact ? 6 : stored_message_bits(arithmetic);
}

HardwareChoice hardware_choice(const Options& options, const Design& design) {
  HardwareChoice choice;
  choice.setup.processing_elements =
      whole_in(options, "processing-elements", 1, kLargestProcessingElements, 64);
  choice.setup.llr_bits = whole_in(options, "llr-bits", 2, 32, message_bits(design.arithmetic));
  choice.setup.list = design.list;
  const std::string sorter = options.optional_text("sorter").value_or("full");
  if (sorter != "full" && sorter != "pruned") {
    throw InputError("--sorter: '" + sorter + "' is neither full nor pruned");
  }
  choice.setup.sorter = sorter == "full" ? Sorter::full : Sorter::pruned;
  choice.clock_mhz = options.optional_number("clock-mhz");
  if (choice.clock_mhz && !(*choice.clock_mhz > 0 && *choice.clock_mhz <= 1e6)) {
    throw InputError("--clock-mhz: from above 0 to 1000000");
  }
  return choice;
}

std::string describe_hardware(const Design& design, const HardwareChoice& choice) {
  const HardwareFigures figures = hardware_figures(design.code.frozen, choice.setup);
  const BlockLength block_length = design.code.block_length();
  Table nodes;
  for (const auto& [type, levels] : count_nodes(node_schedule(design.code.frozen))) {
    nodes.row(std::string(node_type_name(type)), sizes_text(levels));
  }
  Table costs;
  costs.row("every index visited", time_text(block_length, figures.plain_cycles, choice.clock_mhz))
      .row("pruned tree", time_text(block_length, figures.pruned_cycles, choice.clock_mhz))
      .row("memory", grouped(figures.memory.total_bits()) + " bits: channel " +
                         grouped(figures.memory.channel_llr_bits) + ", messages " +
                         grouped(figures.memory.internal_llr_bits) + ", paths " +
                         grouped(figures.memory.path_bits) + ", metrics " +
                         grouped(figures.memory.metric_bits));
  if (choice.setup.list > 1) costs.row("comparators", grouped(figures.comparators));
  std::string setup = std::to_string(choice.setup.processing_elements) +
                      " processing elements, messages of " + std::to_string(choice.setup.llr_bits) +
                      " bits, list size " + std::to_string(choice.setup.list);
  if (choice.setup.list > 1)
    setup += ", " + std::string(sorter_name(choice.setup.sorter)) + " sorter";
  if (choice.clock_mhz) setup += ", " + shortest(*choice.clock_mhz) + " MHz";
  return "Nodes of the pruned tree, by type and length:\n" + nodes.text() + "In hardware (" +
         setup + "):\n" + costs.text() + kCostModelLimits + "\n";
}

Json hardware_json(const Design& design, const HardwareChoice& choice) {
  const HardwareFigures figures = hardware_figures(design.code.frozen, choice.setup);
  const BlockLength block_length = design.code.block_length();
  Json nodes = Json::object();
  for (const auto& [type, levels] : count_nodes(node_schedule(design.code.frozen))) {
    Json sizes = Json::object();
    for (const auto& [level, count] : levels) {
      sizes[std::to_string(std::uint64_t{1} << level)] = count;
    }
    nodes[std::string(node_type_name(type))] = sizes;
  }
  return {{"processing_elements", choice.setup.processing_elements},
          {"llr_bits", choice.setup.llr_bits},
          {"list", choice.setup.list},
          {"sorter", sorter_name(choice.setup.sorter)},
          {"clock_mhz", choice.clock_mhz ? Json(*choice.clock_mhz) : Json(nullptr)},
          {"nodes", nodes},
          {"plain", time_json(block_length, figures.plain_cycles, choice.clock_mhz)},
          {"pruned", time_json(block_length, figures.pruned_cycles, choice.clock_mhz)},
          {"memory_bits",
           {{"channel_llr", figures.memory.channel_llr_bits},
            {"internal_llr", figures.memory.internal_llr_bits},
            {"paths", figures.memory.path_bits},
            {"metrics", figures.memory.metric_bits}}},
          {"comparators", figures.comparators}};
}

}  // namespace frostline::cli
