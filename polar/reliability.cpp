#include "polar/reliability.h"

#include <stdexcept>

namespace frostline {

std::string_view prediction_kind(ReliabilityKind kind) {
  switch (kind) {
    case ReliabilityKind::upper_bound:
      return "upper-bound";
    case ReliabilityKind::lower_bound:
      return "lower-bound";
    case ReliabilityKind::exact:
      return "exact-union";
    case ReliabilityKind::estimate:
      return "estimate";
    case ReliabilityKind::order_only:
      return "order-only";
  }
  throw std::invalid_argument("prediction_kind: no such kind");
}

}  // namespace frostline
