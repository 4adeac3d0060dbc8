// A list decoder as the textbook has it, in single precision: the yardstick of the fast one.
//
// I. Tal, A. Vardy, "List Decoding of Polar Codes", IEEE Trans. IT 61(5), 2015, Algorithms 5 to 18:
// index by index, arrays shared by paths and copied when one writes them; with the LLRs, the f and
// the metric of A. Balatsoukas-Stimming, M. Bastani Parizi, A. Burg, IEEE Trans. SP 63(19), 2015,
// eq. (8b) and (12). No precoding, no pruning, one block at a time.
#pragma once

#include <algorithm>
#include <cmath>
#include <cstdint>
#include <numeric>
#include <vector>

#include "polar/bits.h"
#include "polar/frozen_set.h"

namespace frostline::bench {

class TextbookListDecoder {
 public:
  TextbookListDecoder(const FrozenSet& frozen, unsigned list)
      : frozen_(frozen), n_(frozen.block_length().log2()), list_(list) {
    for (unsigned level = 0; level <= n_; ++level) {
      levels_.emplace_back(std::size_t{1} << (n_ - level), list);
    }
  }

  // The error pattern of the best path. difference: d at frozen indices; channel: the LLR of all
  // positions.
  BitString decode(const BitString& difference, float channel) {
    start(channel);
    for (std::size_t index = 0; index < difference.size(); ++index) {
      for (unsigned path = 0; path < list_; ++path) {
        if (active_[path]) calculate(path, n_, index);
      }
      if (frozen_.is_frozen(index)) {
        for (unsigned path = 0; path < list_; ++path) {
          if (active_[path]) decide(path, index, difference[index]);
        }
      } else {
        fork(index);
      }
      if (index % 2 == 0) continue;
      for (unsigned path = 0; path < list_; ++path) {
        if (active_[path]) update(path, n_, index);
      }
    }
    return best();
  }

 private:
  struct Array {
    std::vector<float> llr;
    std::vector<std::uint8_t> bits;  // the even and the odd branch
  };
  struct Level {
    Level(std::size_t length, unsigned list)
        : arrays(list, {std::vector<float>(length), std::vector<std::uint8_t>(2 * length)}),
          uses(list, 0),
          of_path(list, 0) {}
    std::vector<Array> arrays;
    std::vector<unsigned> uses;
    std::vector<unsigned> of_path;
  };

  void start(float channel) {
    active_.assign(list_, false);
    metric_.assign(list_, 0);
    active_[0] = true;
    for (Level& level : levels_) {
      std::fill(level.uses.begin(), level.uses.end(), 0U);
      level.of_path[0] = 0;
      level.uses[0] = 1;
    }
    std::fill(levels_[0].arrays[0].llr.begin(), levels_[0].arrays[0].llr.end(), channel);
  }

  const Array& read(const Level& level, unsigned path) const {
    return level.arrays[level.of_path[path]];
  }
  // Copies an array that another path uses too.
  Array& write(Level& level, unsigned path) {
    const unsigned shared = level.of_path[path];
    if (level.uses[shared] == 1) return level.arrays[shared];
    const auto free = static_cast<unsigned>(std::find(level.uses.begin(), level.uses.end(), 0U) -
                                            level.uses.begin());
    level.arrays[free] = level.arrays[shared];
    --level.uses[shared];
    level.uses[free] = 1;
    level.of_path[path] = free;
    return level.arrays[free];
  }

  void calculate(unsigned path, unsigned level, std::size_t phase) {
    if (level == 0) return;
    if (phase % 2 == 0) calculate(path, level - 1, phase / 2);
    const std::size_t length = std::size_t{1} << (n_ - level);
    Array& out = write(levels_[level], path);
    const float* const in = read(levels_[level - 1], path).llr.data();
    for (std::size_t j = 0; j < length; ++j) {
      const float a = in[j];
      const float b = in[j + length];
      if (phase % 2 == 0) {
        const float least = std::min(std::fabs(a), std::fabs(b));
        out.llr[j] = (a < 0) != (b < 0) ? -least : least;
      } else {
        out.llr[j] = out.bits[j] != 0 ? b - a : b + a;
      }
    }
  }

  void update(unsigned path, unsigned level, std::size_t phase) {
    const std::size_t length = std::size_t{1} << (n_ - level);
    const std::size_t half = phase / 2 % 2;
    Array& out = write(levels_[level - 1], path);
    const std::uint8_t* const in = read(levels_[level], path).bits.data();
    std::uint8_t* const to = out.bits.data() + half * 2 * length;
    for (std::size_t j = 0; j < length; ++j) {
      to[j] = in[j] ^ in[length + j];
      to[length + j] = in[length + j];
    }
    if (half == 1 && level > 1) update(path, level - 1, phase / 2);
  }

  void decide(unsigned path, std::size_t index, bool bit) {
    const float llr = read(levels_[n_], path).llr[0];
    if (bit != (llr < 0)) metric_[path] += std::fabs(llr);
    write(levels_[n_], path).bits[index % 2] = bit;
  }

  void fork(std::size_t index) {
    struct Alternative {
      float metric;
      unsigned path;
      bool bit;
    };
    std::vector<Alternative> alternatives;
    for (unsigned path = 0; path < list_; ++path) {
      if (!active_[path]) continue;
      const float llr = read(levels_[n_], path).llr[0];
      for (const bool bit : {false, true}) {
        const float cost = bit != (llr < 0) ? std::fabs(llr) : 0;
        alternatives.push_back({metric_[path] + cost, path, bit});
      }
    }
    const std::size_t stay = std::min<std::size_t>(list_, alternatives.size());
    std::nth_element(
        alternatives.begin(), alternatives.begin() + static_cast<std::ptrdiff_t>(stay) - 1,
        alternatives.end(),
        [](const Alternative& a, const Alternative& b) { return a.metric < b.metric; });
    std::vector<unsigned> children(list_, 0);
    for (std::size_t k = 0; k < stay; ++k) ++children[alternatives[k].path];
    for (unsigned path = 0; path < list_; ++path) {
      if (active_[path] && children[path] == 0) drop(path);
    }
    std::vector<bool> continued(list_, false);
    for (std::size_t k = 0; k < stay; ++k) {
      const Alternative& each = alternatives[k];
      unsigned path = each.path;
      if (continued[path]) path = copy(path);
      continued[each.path] = true;
      metric_[path] = each.metric;
      write(levels_[n_], path).bits[index % 2] = each.bit;
    }
  }

  void drop(unsigned path) {
    active_[path] = false;
    for (Level& level : levels_) --level.uses[level.of_path[path]];
  }
  unsigned copy(unsigned path) {
    const auto free =
        static_cast<unsigned>(std::find(active_.begin(), active_.end(), false) - active_.begin());
    active_[free] = true;
    for (Level& level : levels_) {
      level.of_path[free] = level.of_path[path];
      ++level.uses[level.of_path[path]];
    }
    return free;
  }

  BitString best() const {
    unsigned chosen = 0;
    while (!active_[chosen]) ++chosen;
    for (unsigned path = chosen + 1; path < list_; ++path) {
      if (active_[path] && metric_[path] < metric_[chosen]) chosen = path;
    }
    // The bits of the root: what update() wrote last at level 0.
    const std::vector<std::uint8_t>& sums = read(levels_[0], chosen).bits;
    BitString errors(std::size_t{1} << n_);
    for (std::size_t j = 0; j < errors.size(); ++j) errors.set(j, sums[j] != 0);
    return errors;
  }

  const FrozenSet& frozen_;
  unsigned n_;
  unsigned list_;
  std::vector<Level> levels_;  // level 0 is the root
  std::vector<bool> active_;
  std::vector<float> metric_;
};

}  // namespace frostline::bench
