// The ledger: every public bit that depends on the key, by kind.
#pragma once

#include <cstdint>

#include "polar/code.h"

namespace frostline {

// Bits by kind. Accept bits tell something of the error pattern; they are booked at one bit a block
// at most.
struct LeakedBits {
  std::uint64_t syndrome = 0;
  std::uint64_t check = 0;
  std::uint64_t tag = 0;
  std::uint64_t revealed = 0;
  std::uint64_t accept = 0;

  std::uint64_t total() const { return syndrome + check + tag + revealed + accept; }
};

struct Ledger {
  LeakedBits disclosed;  // about all blocks
  LeakedBits accepted;  // about the blocks that stay in the key: privacy amplification subtracts it
};

// blocks: of the whole message; accepted: that stay in the key; tags: groups that were tagged;
// kept_tags: groups that stay. The tag of a rejected group tells nothing of what stays.
Ledger book_leakage(std::uint64_t frozen_count, unsigned check_bits, std::uint64_t blocks,
                    std::uint64_t accepted, std::uint64_t tags, std::uint64_t kept_tags);
inline Ledger book_leakage(const Code& code, std::uint64_t blocks, std::uint64_t accepted,
                           std::uint64_t tags, std::uint64_t kept_tags) {
  return book_leakage(code.frozen.frozen_count(), code.check_bits, blocks, accepted, tags,
                      kept_tags);
}

// Efficiency f: (syndrome + check + tag + revealed bits) / (bits h2(p)), accept bits apart.
// 0 where bits or p is 0.
double efficiency(const LeakedBits& leaked, std::uint64_t bits, double p);

// Net key a sifted bit, plain and conservative.
//   plain:        failed blocks are discarded: (1-FER)(1 - h2(e_phase) - leakage/N)
//   conservative: failed blocks count as fully public: (1-FER)(1 - leakage/N) - h2(e_phase)
struct NetKey {
  double plain;
  double conservative;
};
// fer: 0..1; leakage: public bits a key bit of an accepted block; phase_error: 0..0.5.
NetKey net_key(double fer, double leakage, double phase_error);

}  // namespace frostline
