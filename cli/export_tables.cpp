// csv and schedule: tables for spreadsheets, scripts and control programs.
#include <cmath>
#include <cstdio>

#include "cli/export_formats.h"
#include "construct/designer.h"
#include "construct/selection.h"
#include "polar/precoding.h"

namespace frostline::cli {

void export_csv(const ExportRequest& request, FileSink& out) {
  const Design& design = request.design;
  const BlockLength block_length = design.code.block_length();
  const Judgement judgement = judge(block_length, design.qber, design.arithmetic);
  const std::vector<std::uint32_t> order = freezing_order(judgement.reliability);
  std::vector<std::uint32_t> ranks(order.size());
  for (std::uint32_t rank = 0; rank < order.size(); ++rank) ranks[order[rank]] = rank;
  const PrecodingSchedule schedule(design.code.frozen, design.code.precoding);

  std::vector<std::string> lines = opening_lines(design, request.order);
  lines.push_back(
      "A line an element. index: of u, natural order. frozen: 1 or 0. rank: 0 is the "
      "index most likely to fail. log10_error_probability: of that index in " +
      to_string(design.arithmetic) + " at this p, by " + judgement.by.name +
      "; -inf where it cannot fail. shows: what is made public at a frozen index, plain u "
      "or u precoded.");
  out.write(commented(lines, "# ") + "index,frozen,rank,log10_error_probability,shows\n");
  for (std::size_t k = 0; k < block_length.bits(); ++k) {
    const std::size_t i = in_order(k, block_length, request.order);
    const bool frozen = design.code.frozen.is_frozen(i);
    char row[128];
    std::snprintf(row, sizeof row, "%zu,%d,%u,%.9g,%s\n", i, frozen ? 1 : 0, ranks[i],
                  judgement.reliability.log_error_probability[i] / std::log(10.0),
                  !frozen                      ? "nothing"
                  : schedule.adds_state(i / 8) ? "precoded"
                                               : "plain");
    out.write(row);
  }
}

void export_schedule(const ExportRequest& request, FileSink& out) {
  const Design& design = request.design;
  const BlockLength block_length = design.code.block_length();
  const HardwareSetup& setup = request.hardware.setup;
  const NodeSchedule schedule = node_schedule(design.code.frozen);
  std::vector<std::string> lines = opening_lines(design, request.order);
  lines.push_back(
      "The nodes that a decoder visits, in its order: a mixed node makes the messages of "
      "its first half, which follows with all that is in it, then those of the second.");
  lines.push_back(
      "A node of level k has 2^k = length elements: offset, offset + stride, ... The root "
      "has level " +
      std::to_string(block_length.log2()) + ".");
  lines.push_back("cycles: of the node without its halves, " +
                  std::to_string(setup.processing_elements) + " processing elements, list size " +
                  std::to_string(setup.list) + "; in all " +
                  std::to_string(pruned_cycles(schedule, design.code.frozen, setup)) +
                  (setup.list > 1 && setup.sorter == Sorter::pruned
                       ? " with a cycle for each run of frozen indices."
                       : "."));
  lines.push_back(kCostModelLimits);
  out.write(commented(lines, "# ") + "step,type,level,offset,stride,length,cycles\n");
  std::size_t step = 0;
  for (const ScheduledNode& node : schedule.nodes) {
    const bool natural = request.order == IndexOrder::natural;
    const std::size_t stride = natural ? 1 : block_length.bits() >> node.level;
    out.write(std::to_string(step++) + "," + std::string(node_type_name(node.type)) + "," +
              std::to_string(node.level) + "," +
              std::to_string(in_order(node.offset, block_length, request.order)) + "," +
              std::to_string(stride) + "," + std::to_string(node.length()) + "," +
              std::to_string(node_cycles(node, setup.processing_elements, setup.list)) + "\n");
  }
}

}  // namespace frostline::cli
