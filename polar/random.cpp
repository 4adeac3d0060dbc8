#include "polar/random.h"

#include <sodium.h>

#include <algorithm>
#include <cmath>
#include <stdexcept>
#include <string>

#include "polar/digest.h"

namespace frostline {
namespace {

void store_little_endian(std::uint64_t value, std::uint8_t* bytes) {
  for (unsigned i = 0; i < 8; ++i) bytes[i] = static_cast<std::uint8_t>(value >> (8 * i));
}

// p times 2^64, rounded down. REQUIRES: 0 <= p < 1.
std::uint64_t threshold(double p) { return static_cast<std::uint64_t>(std::ldexp(p, 64)); }

}  // namespace

RandomStream::RandomStream(std::uint64_t seed, std::string_view purpose, std::uint64_t stream) {
  std::string text = "frostline stream " + std::string(purpose);
  std::uint8_t seed_bytes[8];
  store_little_endian(seed, seed_bytes);
  text += '\0';
  text.append(reinterpret_cast<const char*>(seed_bytes), sizeof seed_bytes);
  key_ = sha256(text);
  store_little_endian(stream, nonce_.data());
}

void RandomStream::refill() {
  // buffer_ is XORed with the key stream, so it starts from zero; a ChaCha20 block has 64 bytes.
  buffer_.fill(0);
  auto* bytes = reinterpret_cast<unsigned char*>(buffer_.data());
  crypto_stream_chacha20_xor_ic(bytes, bytes, sizeof buffer_, nonce_.data(), block_, key_.data());
  block_ += sizeof buffer_ / 64;
  used_ = 0;
}

std::uint64_t RandomStream::below(std::uint64_t bound) {
  if (bound == 0) throw std::invalid_argument("RandomStream::below(0)");
  // Values below 2^64 mod bound would be too frequent: they are drawn again.
  const std::uint64_t reject = (0 - bound) % bound;
  std::uint64_t value = next();
  while (value < reject) value = next();
  return value % bound;
}

double RandomStream::uniform() { return std::ldexp(static_cast<double>(next() >> 11), -53); }

namespace {

// Lengths of the runs of zeros between ones, by inversion of their distribution function. A table
// over the top bits of a number gives nearly all of them at once.
class GapTable {
 public:
  // REQUIRES: 0 < p < 1.
  explicit GapTable(double p) {
    // limits_[k]: 2^64 times the probability of a gap of at most k. Products only: the same
    // numbers on every machine.
    double longer = 1;
    for (unsigned k = 0; k < kLongest; ++k) {
      longer *= 1 - p;
      limits_[k] = longer < kTiny ? ~std::uint64_t{0} : longer < 1 ? ~threshold(longer) + 1 : 0;
    }
    unsigned gap = 0;
    for (std::uint64_t slot = 0; slot < kSlots; ++slot) {
      while (gap < kLongest && limits_[gap] <= slot << kShift) ++gap;
      first_[slot] = static_cast<std::uint8_t>(gap);
    }
  }

  // The gap that a uniform number stands for; kLongest means that it is at least that long, and as
  // gaps have no memory the rest of it is drawn anew.
  unsigned gap(std::uint64_t uniform) const {
    unsigned k = first_[uniform >> kShift];
    while (k < kLongest && uniform >= limits_[k]) ++k;
    return k;
  }

  static constexpr unsigned kLongest = 255;

 private:
  static constexpr unsigned kShift = 52;
  static constexpr std::uint64_t kSlots = std::uint64_t{1} << (64 - kShift);
  static constexpr double kTiny = 0x1p-60;

  std::array<std::uint64_t, kLongest> limits_;
  std::array<std::uint8_t, kSlots> first_;
};

// Above it as many numbers are drawn for gaps as for bits.
constexpr double kSparse = 0.125;

}  // namespace

void RandomStream::bernoulli(double p, std::size_t bits, Span<std::uint64_t> words) {
  if (!(p >= 0 && p <= 1)) throw std::invalid_argument("probability outside 0 .. 1");
  if (p < kSparse) {
    draw_gaps(p, bits, words);
  } else {
    draw_bits(p, bits, words);
  }
}

void RandomStream::draw_gaps(double p, std::size_t bits, Span<std::uint64_t> words) {
  std::fill_n(words.begin(), (bits + 63) / 64, 0);
  if (p == 0) return;
  const GapTable table(p);
  std::size_t position = 0;
  while (true) {
    const unsigned gap = table.gap(next());
    position += gap;
    if (position >= bits) return;
    if (gap == GapTable::kLongest) continue;
    words[position / 64] |= std::uint64_t{1} << (position % 64);
    ++position;
  }
}

void RandomStream::draw_bits(double p, std::size_t bits, Span<std::uint64_t> words) {
  const std::size_t count = (bits + 63) / 64;
  const std::uint64_t limit = p < 1 ? threshold(p) : 0;
  for (std::size_t i = 0; i < count; ++i) {
    // 64 numbers U of 64 bits are compared with the limit at once, from their top bits down: a
    // number is decided at the first bit that differs. About 8 words decide all 64.
    std::uint64_t ones = p < 1 ? 0 : ~std::uint64_t{0};
    std::uint64_t open = p < 1 ? ~std::uint64_t{0} : 0;
    for (int b = 63; b >= 0 && open != 0; --b) {
      const std::uint64_t drawn = next();
      if ((limit >> b) & 1U) {
        ones |= open & ~drawn;
        open &= drawn;
      } else {
        open &= ~drawn;
      }
    }
    words[i] = ones;
  }
  if (bits % 64 != 0) words[count - 1] &= (std::uint64_t{1} << (bits % 64)) - 1;
}

}  // namespace frostline
