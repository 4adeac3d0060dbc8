// What a genie-aided decoder of planes holds at every node of its tree, written from the rules
// alone: the judge of metric weights.
#pragma once

#include <cstddef>
#include <functional>
#include <vector>

#include "tests/support/genie_decoder.h"

namespace frostline::testing {

// Calls see(k, first, wrong, magnitude) for every message of every node of the 2^k indices from
// first on when the error pattern is x and all earlier u are known. wrong: the sign is not the true
// bit. magnitude: in units; 1 for the one positive channel LLR that nodes at index 0 hold.
class NodeMessages {
 public:
  using See = std::function<void(unsigned k, std::size_t first, bool wrong, std::size_t magnitude)>;

  NodeMessages(unsigned planes, See see)
      : largest_(2 * ((1 << planes) - 1)), see_(std::move(see)) {}

  void walk(const std::vector<bool>& x) const {
    unsigned k = 0;
    while ((std::size_t{1} << k) < x.size()) ++k;
    descend(std::vector<SignedMessage>(x.size(), SignedMessage{false, 1}), x, k, 0);
  }

 private:
  void descend(const std::vector<SignedMessage>& messages, const std::vector<bool>& x, unsigned k,
               std::size_t first) const {
    for (std::size_t j = 0; j < x.size(); ++j) {
      const int magnitude = first == 0 ? 1 : messages[j].magnitude / 2;
      see_(k, first, messages[j].negative != x[j], static_cast<std::size_t>(magnitude));
    }
    if (k == 0) return;
    const std::size_t half = x.size() / 2;
    std::vector<SignedMessage> child(half);
    std::vector<bool> bits(half);
    for (std::size_t j = 0; j < half; ++j) {
      child[j] = f_rule(messages[j], messages[j + half]);
      bits[j] = x[j] != x[j + half];
    }
    descend(child, bits, k - 1, first);
    for (std::size_t j = 0; j < half; ++j) {
      child[j] = planes_g_rule(messages[j], messages[j + half], bits[j], largest_);
      bits[j] = x[j + half];
    }
    descend(child, bits, k - 1, first + half);
  }

  int largest_;
  See see_;
};

}  // namespace frostline::testing
