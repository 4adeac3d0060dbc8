// frostline batch: designs over a grid, in parallel, resumable; and the choice among them.
#include <tbb/parallel_for.h>

#include <algorithm>
#include <atomic>
#include <filesystem>
#include <iostream>
#include <mutex>

#include "cli/account.h"
#include "cli/command.h"
#include "cli/design_file.h"
#include "cli/design_library.h"
#include "cli/design_options.h"
#include "cli/grid.h"
#include "cli/plot.h"
#include "cli/run_state.h"
#include "construct/designer.h"
#include "decode/exchange/streams.h"
#include "polar/error.h"
#include "polar/limits.h"

namespace frostline::cli {
namespace {

Options make_options() {
  Options options("batch",
                  "Chooses frozen sets over a grid of block lengths, QBERs and FER targets, and "
                  "keeps an index of them; with --select, tells which one to use.",
                  {});
  options.value("block-lengths", "LIST", "block lengths, for example 1024,4096")
      .value("qbers", "LIST",
             "QBERs: values and ranges LOW:HIGH:STEP, for example 0.005,0.01:0.11:0.01")
      .value("fers", "LIST", "FER targets, for example 0.1,0.001 (0.1)")
      .value("constructions", "LIST", construction_list());
  options.value("lists", "LIST",
                "list sizes of the decoder, powers of two from 1 to 128 (1); with --select the one "
                "to look for");
  add_code_options(options);
  options.value("output,o", "DIR", "the folder of the designs")
      .values("select", "N P", "print the design in DIR to use at this block length and QBER")
      .value("plot", "FILE", "draw f against N for each QBER, .svg or .png")
      .computing()
      .epilogue(
          "Examples:\n"
          "  frostline batch --block-lengths 4096,65536 --qbers 0.01:0.11:0.01 --fers 0.1 -o sets\n"
          "  frostline batch --select 65536 0.023 -o sets\n"
          "A run that was interrupted goes on where it stopped: whole files are kept.\n");
  return options;
}

// The indices of one block length, QBER and construction are ranked once for all FER targets.
struct Cell {
  BlockLength block_length;
  double qber;
  Construction construction;
};

struct Grid {
  std::vector<Cell> cells;
  std::vector<double> fers;
  std::vector<std::uint64_t> lists;
  Arithmetic arithmetic;
  double order_alpha = 0;
  std::size_t size() const { return cells.size() * lists.size() * fers.size(); }
};

// Every FER target needs a FER that can be told.
void require_estimate(const CodeOptions& code, const Arithmetic& arithmetic) {
  if (has_list_estimate(arithmetic, code.list)) return;
  throw InputError("--lists: the FER of list size " + std::to_string(code.list) + " in " +
                   to_string(arithmetic) + " is not known");
}

Grid make_grid(const Options& options) {
  Grid grid;
  grid.arithmetic = arithmetic_option(options);
  grid.order_alpha = order_alpha_option(options);
  grid.fers = parse_values(options.optional_text("fers").value_or("0.1"), "--fers");
  for (const double fer : grid.fers) require_probability(fer, "--fers");
  grid.lists = parse_whole_values(options.optional_text("lists").value_or("1"), "--lists");
  const std::vector<double> qbers = parse_values(options.text("qbers"), "--qbers");
  for (const double qber : qbers) require_error_rate(qber, "--qbers");
  std::vector<Construction> constructions;
  if (options.has("constructions")) {
    for (const std::string& name : parse_words(options.text("constructions"), "--constructions")) {
      constructions.push_back(construction_named(name, options));
    }
  } else {
    constructions.push_back(construction_option(options, grid.arithmetic));
  }
  for (const std::uint64_t bits :
       parse_whole_values(options.text("block-lengths"), "--block-lengths")) {
    for (const std::uint64_t list : grid.lists) {
      require_estimate(code_options(options, BlockLength(bits), list), grid.arithmetic);
    }
    for (const double qber : qbers) {
      for (const Construction& construction : constructions) {
        grid.cells.push_back({BlockLength(bits), qber, construction});
      }
    }
  }
  return grid;
}

// At least three decimals, so that names sort as numbers do.
std::string qber_in_name(double qber) {
  std::string text = shortest(qber);
  if (text.find('e') != std::string::npos) return text;
  while (text.size() < 5) text += '0';
  return text;
}

// n65536/qber-0.020-fer-0.1.design.json; what differs from the defaults is part of the name.
std::string file_name(const Grid& grid, const Cell& cell, double fer, const CodeOptions& code,
                      bool named_check_bits) {
  std::string name = "n" + std::to_string(cell.block_length.bits()) + "/qber-" +
                     qber_in_name(cell.qber) + "-fer-" + shortest(fer);
  if (cell.construction.name != default_construction(grid.arithmetic).name) {
    name += "-" + cell.construction.name;
  }
  if (!(grid.arithmetic == Arithmetic::planes_of(3))) {
    std::string arithmetic = to_string(grid.arithmetic);
    std::replace(arithmetic.begin(), arithmetic.end(), ':', '-');
    name += "-" + arithmetic;
  }
  if (grid.order_alpha != 0) name += "-weighted-" + shortest(grid.order_alpha);
  if (code.list != 1) name += "-list-" + std::to_string(code.list);
  const Precoding usual = code.list == 1 ? Precoding::none : Precoding::state8;
  if (code.precoding != usual) name += "-" + std::string(precoding_name(code.precoding));
  if (named_check_bits) name += "-c" + std::to_string(code.check_bits);
  return name + ".design.json";
}

bool same_parameters(const Construction& a, const Construction& b) {
  return a.name == b.name && a.parameters == b.parameters;
}

// The design that stands at a path already. None where there is no file or only part of one: that
// is made again. A whole file that was edited, or made with other options, is somebody's work and
// an error.
std::optional<Design> existing_design(const std::string& path, const Design& wanted_shape) {
  if (!std::filesystem::exists(path)) return std::nullopt;
  const std::string text = read_file(path);
  try {
    parse_json(text, path);
  } catch (const InputError&) {
    return std::nullopt;
  }
  Design design = design_from_json(text, path);
  if (design.code.block_length() != wanted_shape.code.block_length() ||
      design.qber != wanted_shape.qber ||
      !same_parameters(design.construction, wanted_shape.construction) ||
      !(design.arithmetic == wanted_shape.arithmetic) || design.list != wanted_shape.list ||
      design.code.check_bits != wanted_shape.code.check_bits ||
      design.code.precoding != wanted_shape.code.precoding ||
      design.options != wanted_shape.options) {
    throw InputError("'" + path +
                     "' was made with other options; move it away or choose another -o");
  }
  return design;
}

// Makes what is missing of one cell. Returns its index entries.
class CellWorker {
 public:
  CellWorker(const Grid& grid, const Options& options, std::string folder)
      : grid_(grid), options_(options), folder_(std::move(folder)) {}

  std::vector<LibraryEntry> work(const Cell& cell, const std::function<bool()>& stopped,
                                 const std::function<void(bool made)>& one_done) const {
    std::vector<LibraryEntry> entries;
    std::optional<Ranking> ranking;
    for (std::size_t k = 0; k < grid_.lists.size() * grid_.fers.size(); ++k) {
      if (stopped()) return entries;
      const double fer = grid_.fers[k % grid_.fers.size()];
      const CodeOptions code =
          code_options(options_, cell.block_length, grid_.lists[k / grid_.fers.size()]);
      const std::string file = file_name(grid_, cell, fer, code, options_.has("check-bits"));
      const std::string path = folder_ + "/" + file;
      std::optional<Design> design = existing_design(path, shape(cell, code, fer));
      const bool make = !design.has_value();
      if (make) {
        if (!ranking) {
          ranking = rank_indices(cell.block_length, cell.qber, cell.construction, grid_.order_alpha,
                                 grid_.arithmetic);
        }
        design = make_design(*ranking, {Goal::Kind::fer, fer, 0}, code, {{"fer", fer}}).design;
        FileSink sink(path);
        sink.write(design_to_json(*design));
        sink.commit();
      }
      entries.push_back(library_entry(file, fer, *design));
      one_done(make);
    }
    return entries;
  }

 private:
  // What an existing file must agree with.
  Design shape(const Cell& cell, const CodeOptions& code, double fer) const {
    Code empty{FrozenSet(cell.block_length, BitString(cell.block_length.bits())), code.precoding,
               code.check_bits};
    return {std::move(empty),
            cell.qber,
            recorded_construction(cell.construction, grid_.order_alpha, grid_.arithmetic),
            code.list,
            grid_.arithmetic,
            {},
            {},
            {{"fer", fer}},
            {}};
  }

  const Grid& grid_;
  const Options& options_;
  std::string folder_;
};

// Entries of this run replace those of the same file; others stay.
std::vector<LibraryEntry> merged(std::vector<LibraryEntry> old, std::vector<LibraryEntry> made) {
  for (LibraryEntry& entry : old) {
    const bool replaced = std::any_of(made.begin(), made.end(), [&](const LibraryEntry& other) {
      return other.file == entry.file;
    });
    if (!replaced) made.push_back(std::move(entry));
  }
  return made;
}

struct BatchCount {
  std::atomic<std::uint64_t> made{0};
  std::atomic<std::uint64_t> kept{0};
};

std::vector<LibraryEntry> run_grid(const Grid& grid, const Options& options,
                                   const std::string& folder, RunState& state, BatchCount& count) {
  for (const Cell& cell : grid.cells) {
    make_folder(folder + "/n" + std::to_string(cell.block_length.bits()));
  }
  // The longest blocks first, so that no core ends up with one of them alone at the end.
  std::vector<Cell> cells = grid.cells;
  std::stable_sort(cells.begin(), cells.end(), [](const Cell& a, const Cell& b) {
    return a.block_length.log2() > b.block_length.log2();
  });
  const RunControl control = state.control();
  const CellWorker worker(grid, options, folder);
  std::mutex mutex;
  std::vector<LibraryEntry> entries;
  tbb::parallel_for(
      std::size_t{0}, cells.size(),
      [&](std::size_t i) {
        if (control.stopped()) return;
        std::vector<LibraryEntry> made = worker.work(
            cells[i], [&] { return control.stopped(); },
            [&](bool is_new) {
              ++(is_new ? count.made : count.kept);
              const std::lock_guard<std::mutex> lock(mutex);
              if (control.progress) control.progress(count.made + count.kept, grid.size());
            });
        const std::lock_guard<std::mutex> lock(mutex);
        std::move(made.begin(), made.end(), std::back_inserter(entries));
      },
      tbb::simple_partitioner());
  if (control.stopped()) throw Interrupted();
  return entries;
}

// One diagram a FER target, one curve a QBER, the limit dotted in the same colour.
void plot_library(const std::string& path, std::vector<LibraryEntry> entries) {
  std::sort(entries.begin(), entries.end(), [](const LibraryEntry& a, const LibraryEntry& b) {
    return std::tie(b.fer_target, a.qber, a.construction, a.list, a.block_length) <
           std::tie(a.fer_target, b.qber, b.construction, b.list, b.block_length);
  });
  const auto same_curve = [](const LibraryEntry& a, const LibraryEntry& b) {
    return a.fer_target == b.fer_target && a.qber == b.qber && a.construction == b.construction &&
           a.list == b.list;
  };
  std::vector<Diagram> diagrams;
  double fer = -1;
  for (auto first = entries.begin(); first != entries.end();) {
    if (first->fer_target != fer) {
      fer = first->fer_target;
      diagrams.push_back({"Leakage of designs for FER " + shortest(fer) +
                              " (solid) and the finite-length limit (dotted)",
                          "block length N",
                          "efficiency f, (M + c) / (N h2)",
                          "set logscale x 2\nset format x '2^{%L}'\nset yrange [1:*]\n",
                          {}});
    }
    Diagram& diagram = diagrams.back();
    const std::string color = " lw 1.5 lc " + std::to_string(diagram.series.size() / 2 % 8 + 1);
    std::string name = "p " + shortest(first->qber);
    if (first->construction != "density-evolution") name += " " + first->construction;
    if (first->list != 1) name += " L " + std::to_string(first->list);
    Series f{name, "linespoints pt 7 ps 0.6" + color, {}};
    Series limit{"", "lines dt 3" + color, {}};
    const auto curve = first;
    for (; first != entries.end() && same_curve(*first, *curve); ++first) {
      const auto n = static_cast<double>(first->block_length);
      f.points.emplace_back(n, first->leakage.efficiency);
      if (first->leakage.limit_efficiency) {
        limit.points.emplace_back(n, *first->leakage.limit_efficiency);
      }
    }
    if (limit.points.empty()) limit.points = {{f.points[0].first, 1.0}};
    diagram.series.push_back(std::move(f));
    diagram.series.push_back(std::move(limit));
  }
  draw(path, diagrams);
}

// Whether an entry comes before another as the design for a measured QBER: the nearest at or above
// it, then the largest FER target (the least leakage).
bool better_choice(const LibraryEntry& a, const LibraryEntry& b) {
  return std::tie(a.qber, b.fer_target, a.file) < std::tie(b.qber, a.fer_target, b.file);
}

int select(const Options& options) {
  const std::vector<std::string> words = options.texts("select");
  if (words.size() != 2) throw InputError("batch: --select takes a block length and a QBER");
  const std::vector<std::uint64_t> lengths = parse_whole_values(words[0], "--select");
  const std::vector<double> qbers = parse_values(words[1], "--select");
  if (lengths.size() != 1 || qbers.size() != 1) {
    throw InputError("batch: --select takes a block length and a QBER");
  }
  const double qber = qbers[0];
  const BlockLength block_length(lengths[0]);
  require_error_rate(qber, "--select");
  const std::string folder = options.text("output");
  if (!std::filesystem::exists(folder + "/index.json")) {
    throw InputError("'" + folder + "' holds no index.json of designs");
  }
  std::optional<double> fer;
  if (options.has("fers")) {
    const std::vector<double> fers = parse_values(options.text("fers"), "--fers");
    if (fers.size() != 1) throw InputError("batch: --select takes one FER target in --fers");
    fer = fers[0];
  }
  const std::vector<std::uint64_t> lists =
      parse_whole_values(options.optional_text("lists").value_or("1"), "--lists");
  if (lists.size() != 1) throw InputError("batch: --select takes one list size in --lists");
  std::optional<LibraryEntry> best;
  for (const LibraryEntry& entry : read_index(folder)) {
    if (entry.block_length != block_length.bits() || entry.qber < qber) continue;
    if (entry.list != lists[0]) continue;
    if (fer && entry.fer_target != *fer) continue;
    if (!best || better_choice(entry, *best)) best = entry;
  }
  if (!best) {
    throw InputError("'" + folder + "' has no design for block length " + words[0] + " and QBER " +
                     words[1] + " or above with list size " + std::to_string(lists[0]));
  }
  const std::string path = folder + "/" + best->file;
  const Design design = read_design(path);
  const double entropy = static_cast<double>(block_length.bits()) * binary_entropy(qber);
  const double efficiency = static_cast<double>(design.code.leakage_bits()) / entropy;
  const Prediction here = predict(design.code.frozen, judge(block_length, qber, design.arithmetic),
                                  list_setting(design, qber, design.list));
  // What a design for the measured QBER would leak, by the same construction and FER target.
  const Ranking ranking = rank_indices(block_length, qber, default_construction(design.arithmetic),
                                       0, design.arithmetic);
  const CodeOptions code{design.code.check_bits, design.code.precoding, false, design.list};
  const Design fitted =
      make_design(ranking, {Goal::Kind::fer, best->fer_target, 0}, code, {}).design;
  const double mismatch = efficiency - static_cast<double>(fitted.code.leakage_bits()) / entropy;
  if (options.json()) {
    Json root;
    root["file"] = path;
    root["qber"] = qber;
    root["design_qber"] = design.qber;
    root["fer_target"] = best->fer_target;
    root["efficiency"] = efficiency;
    root["predicted"] = to_json(here);
    root["mismatch_bits"] = static_cast<std::int64_t>(design.code.leakage_bits()) -
                            static_cast<std::int64_t>(fitted.code.leakage_bits());
    root["mismatch_efficiency"] = mismatch;
    std::cout << root.dump(2) << '\n';
    return kDone;
  }
  std::cout << path << '\n';
  if (options.quiet()) return kDone;
  Table table;
  table.row("design QBER", shortest(design.qber))
      .row("leakage a block", grouped(design.code.leakage_bits()) + " bits, f " +
                                  fixed(efficiency, 4) + " at QBER " + shortest(qber))
      .row("predicted FER there", prediction_sentence(here))
      .row("cost of the mismatch", fixed(mismatch, 4) + " in f against a design for QBER " +
                                       shortest(qber) + " and FER " + shortest(best->fer_target));
  std::cout << table.text();
  return kDone;
}

}  // namespace

int run_batch(const std::vector<std::string>& arguments) {
  Options options = make_options();
  if (!options.parse(arguments)) return kDone;
  if (options.has("select")) return select(options);
  const std::string folder = options.text("output");
  const Grid grid = make_grid(options);
  if (options.has("plot")) require_plot(options.text("plot"));
  const LibraryLock lock(folder);
  const std::vector<LibraryEntry> old = read_index(folder);
  RunState state("batch", 0, options.quiet(), "designs");
  BatchCount count;
  std::vector<LibraryEntry> made = run_grid(grid, options, folder, state, count);
  const std::vector<LibraryEntry> entries = merged(old, made);
  write_index(folder, entries);
  if (options.has("plot")) plot_library(options.text("plot"), entries);
  if (options.json()) {
    Json root;
    root["folder"] = folder;
    root["designs"] = entries.size();
    root["made"] = count.made.load();
    root["kept"] = count.kept.load();
    root["seconds"] = state.seconds();
    std::cout << root.dump(2) << '\n';
  } else if (!options.quiet()) {
    std::cout << counted(count.made, "design") << " made, " << grouped(count.kept)
              << " kept; the index of " << counted(entries.size(), "design") << " is in " << folder
              << "/index.json and index.csv. " << fixed(state.seconds(), 1) << " s.\n";
  }
  return kDone;
}

}  // namespace frostline::cli
