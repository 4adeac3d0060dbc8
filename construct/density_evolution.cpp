#include "construct/density_evolution.h"

#include <stdexcept>

#include "construct/density_tree.h"
#include "construct/integer_density.h"
#include "polar/limits.h"

namespace frostline {

Reliability density_evolution(BlockLength block_length, double p, const Arithmetic& arithmetic) {
  require_error_rate(p, "QBER");
  Reliability reliability;
  reliability.kind = ReliabilityKind::exact;
  reliability.log_error_probability.resize(block_length.bits());
  LeafErrors errors(reliability.log_error_probability);
  switch (arithmetic.kind) {
    case Arithmetic::Kind::planes:
      visit_planes_tree(p, block_length.bits(), arithmetic.planes, errors);
      break;
    case Arithmetic::Kind::integer: {
      const IntegerValues values(arithmetic.llr_bits, arithmetic.channel_level);
      visit_density_tree(
          p, block_length.bits(),
          [&](double error) { return IntegerDensity::below_chain(values, error); }, errors);
      break;
    }
    case Arithmetic::Kind::exact:
      throw std::invalid_argument("density_evolution: exact arithmetic has no finite density");
  }
  return reliability;
}

}  // namespace frostline
