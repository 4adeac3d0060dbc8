// From what a user asks for to a design: construction, order, choice of the frozen count.
//
// `design` asks once; `batch` ranks the indices of a block length and a QBER once and chooses many
// times.
#pragma once

#include <cstdint>
#include <optional>
#include <vector>

#include "construct/list_estimate.h"
#include "polar/arithmetic.h"
#include "polar/design.h"
#include "polar/reliability.h"

namespace frostline {

// The construction that serves an arithmetic best: exact density evolution where it exists, else
// degrading merge.
Construction default_construction(const Arithmetic& arithmetic);

// How likely each index fails in a given arithmetic, by the most trusted method that there is.
struct Judgement {
  Construction by;
  Reliability reliability;
  std::optional<Reliability> lower;  // where reliability is an upper bound and a lower one is known
};

// The indices of one block length at one QBER in the order in which they are to be frozen.
struct Ranking {
  BlockLength block_length;
  double qber;
  Construction construction;
  double order_alpha;
  Arithmetic arithmetic;
  std::vector<std::uint32_t> order;
  Judgement judged;                // by the construction itself, unless that yields an order only
  std::vector<double> sums;        // union_sums of judged.reliability along the order
  std::vector<double> lower_sums;  // the same for judged.lower; empty without
};

// order_alpha: 0 orders by ln P; else by ln P - alpha log2(row weight), 0 to 10 (InputError
// otherwise), which prefers heavy rows among equally reliable ones; it needs probabilities. An
// order-only construction is judged by default_construction(arithmetic).
Ranking rank_indices(BlockLength block_length, double qber, const Construction& construction,
                     double order_alpha, const Arithmetic& arithmetic);

// The same from reliabilities at hand, also of a construction that the catalogue does not know.
Ranking rank_by(BlockLength block_length, double qber, Judgement own, double order_alpha,
                const Arithmetic& arithmetic);

// The construction as a design records it: with the order's weight, and with what judged an order.
Construction recorded_construction(const Construction& construction, double order_alpha,
                                   const Arithmetic& arithmetic);

// What the frozen count is chosen by.
struct Goal {
  enum class Kind { fer, frozen, efficiency, best_key };
  Kind kind = Kind::fer;
  double value = 0.1;              // FER, or efficiency F (M + c at most F N h2(p)), or phase error
  std::uint64_t frozen_count = 0;  // of Kind::frozen
};

// What else is part of the design.
struct CodeOptions {
  unsigned check_bits = 0;
  Precoding precoding = Precoding::none;
  bool reveal_order = false;  // list the open indices, most likely to fail first
  unsigned list = 1;          // L of the decoder, a power of two from 1 to 128
};

struct Designed {
  Design design;
  std::optional<double> net_key_rate;  // of Kind::best_key; not positive means no key
};

// options: what was asked, for the provenance. With a list the FER is an estimate
// (construct/list_estimate.h). Throws InputError when the goal is out of range, or needs an
// estimate that there is not.
Designed make_design(const Ranking& ranking, const Goal& goal, const CodeOptions& code,
                     Parameters options);

// The user's own frozen set, judged for an arithmetic.
Design design_from_mask(const FrozenSet& mask, double qber, const Arithmetic& arithmetic,
                        const CodeOptions& code, Parameters options);

// The most trusted judgement of any frozen set of that length in that arithmetic at another QBER.
Judgement judge(BlockLength block_length, double qber, const Arithmetic& arithmetic);

// With L = 1 the union over the open indices: min(1, sum), kind, and the interval where both bounds
// are known. With a list an estimate: that of the set with the same union which the judgement's own
// order freezes; none where there is no estimate. The judgement is one at setting.qber.
Prediction predict(const FrozenSet& frozen, const Judgement& judgement, const ListSetting& setting);
// The setting of a design's code and arithmetic at a QBER, decoded with a list size.
ListSetting list_setting(const Design& design, double qber, unsigned list);

}  // namespace frostline
