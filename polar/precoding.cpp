#include "polar/precoding.h"

#include <sodium.h>

#include <array>
#include <stdexcept>
#include <string>

#include "polar/error.h"
#include "polar/transform.h"

namespace frostline {
namespace {

constexpr std::uint8_t kAddsState = 1;
constexpr std::uint8_t kMovesState = 2;

enum class ByteKind { frozen, open, mixed };

ByteKind kind_of(std::uint8_t frozen_places) {
  if (frozen_places == 0xFF) return ByteKind::frozen;
  return frozen_places == 0 ? ByteKind::open : ByteKind::mixed;
}

std::uint8_t flags_of(ByteKind kind, ByteKind next) {
  if (kind == ByteKind::mixed) return kAddsState | kMovesState;
  if (kind == next) return 0;
  if (kind == ByteKind::frozen) return kAddsState;
  return kMovesState;
}

// Rows of 64 lanes or more: whole words. `word` selects 64 of the lanes.
struct WideRows {
  Span<std::uint64_t> words;
  std::size_t words_per_row;

  std::size_t columns() const { return words_per_row; }
  std::uint64_t get(std::size_t row, std::size_t column) const {
    return words[row * words_per_row + column];
  }
  void add(std::size_t row, std::size_t column, std::uint64_t bits) const {
    words[row * words_per_row + column] ^= bits;
  }
};

// Rows of fewer than 64 lanes: several rows in a word, none across two, as lanes is a power of two.
struct NarrowRows {
  Span<std::uint64_t> words;
  std::size_t lanes;

  std::size_t columns() const { return 1; }
  std::uint64_t get(std::size_t row, std::size_t) const {
    const std::uint64_t mask = (std::uint64_t{1} << lanes) - 1;
    return (words[row * lanes / 64] >> (row * lanes % 64)) & mask;
  }
  void add(std::size_t row, std::size_t, std::uint64_t bits) const {
    words[row * lanes / 64] ^= bits << (row * lanes % 64);
  }
};

// S of up to 64 lanes at a time: word k holds bit k of every lane's S.
using StateWords = std::array<std::uint64_t, 8>;

template <typename Rows>
void add_offsets(const Rows& rows, std::size_t byte, std::size_t column, std::uint8_t places,
                 const StateWords& state) {
  for (unsigned k = 0; k < 8; ++k) {
    if (!((places >> k) & 1U)) continue;
    std::uint64_t offset = 0;
    for (unsigned b = 0; b < 8; ++b) {
      if ((kState8Rows[k] >> b) & 1U) offset ^= state[b];
    }
    rows.add(8 * byte + k, column, offset);
  }
}

template <typename Rows>
void move_state(const Rows& rows, std::size_t byte, std::size_t column, std::uint8_t places,
                StateWords& state) {
  const std::uint64_t top = state[7];
  for (unsigned k = 7; k > 0; --k) state[k] = state[k - 1];
  state[0] = top;  // x^8 = x^4 + x^3 + x^2 + 1
  for (const unsigned k : {2U, 3U, 4U}) state[k] ^= top;
  for (unsigned k = 0; k < 8; ++k) {
    if (!((places >> k) & 1U)) state[k] ^= rows.get(8 * byte + k, column);
  }
}

template <typename Rows>
void apply_to(const PrecodingSchedule& schedule, const Rows& rows) {
  std::vector<StateWords> states(rows.columns(), StateWords{});
  for (const std::uint32_t byte : schedule.active_bytes()) {
    const std::uint8_t places = schedule.frozen_places(byte);
    const bool adds = schedule.adds_state(byte);
    const bool moves = schedule.moves_state(byte);
    for (std::size_t column = 0; column < rows.columns(); ++column) {
      if (adds) add_offsets(rows, byte, column, places, states[column]);
      if (moves) move_state(rows, byte, column, places, states[column]);
    }
  }
  sodium_memzero(states.data(), states.size() * sizeof(StateWords));
}

}  // namespace

std::string_view precoding_name(Precoding precoding) {
  return precoding == Precoding::state8 ? "state8" : "none";
}

Precoding parse_precoding(std::string_view word) {
  if (word == "none") return Precoding::none;
  if (word == "state8") return Precoding::state8;
  throw InputError("precoding '" + std::string(word) + "' is neither none nor state8");
}

// Row k gives the coefficient of x^0 of x^(122 + 96 k) times S. No other matrix that was tried
// measures better (tests/bench/precoding_rows.txt). Why these:
// - A's polynomial is primitive, so every linear function of S is such a coefficient for exactly
//   one exponent modulo 255, a step of A adds 1 to it, and any one row, seen at 8 successive steps,
//   tells all of S.
// - The exponents lie at least 30 apart modulo 255, so no two rows show the same function of S
//   within 30 steps: what one frozen bit has checked, another does not check again.
// - The rows are independent, so a byte with eight frozen places shows all of S.
// - Every row and every column has weight 3 to 5: each frozen bit depends on about half of S, and
//   each bit of S shows in about half of the places. 96 is the step with the widest spacing for
//   which such rows exist.
const std::uint8_t kState8Rows[8] = {0xCE, 0x29, 0xB6, 0xDC, 0x16, 0x75, 0x2B, 0x98};

std::uint8_t state8_advance(std::uint8_t state, std::uint8_t open_byte) {
  const unsigned reduced = (state & 0x80U) ? 0x1DU : 0U;
  return static_cast<std::uint8_t>((unsigned{state} << 1) ^ reduced ^ open_byte);
}

std::uint8_t state8_offsets(std::uint8_t state) {
  unsigned offsets = 0;
  for (unsigned k = 0; k < 8; ++k) {
    unsigned sum = state & kState8Rows[k];
    sum ^= sum >> 4;
    sum ^= sum >> 2;
    sum ^= sum >> 1;
    offsets |= (sum & 1U) << k;
  }
  return static_cast<std::uint8_t>(offsets);
}

PrecodingSchedule::PrecodingSchedule(const FrozenSet& frozen, Precoding precoding)
    : flags_(frozen.block_length().bytes()), frozen_places_(frozen.block_length().bytes()) {
  const Span<const std::uint64_t> mask = frozen.mask().words();
  for (std::size_t j = 0; j < frozen_places_.size(); ++j) {
    frozen_places_[j] = static_cast<std::uint8_t>(mask[j / 8] >> (8 * (j % 8)));
  }
  if (precoding == Precoding::none) return;
  for (std::size_t j = 0; j < flags_.size(); ++j) {
    const std::size_t next = j + 1 < flags_.size() ? j + 1 : j;
    flags_[j] = flags_of(kind_of(frozen_places_[j]), kind_of(frozen_places_[next]));
    if (flags_[j] != 0) active_.push_back(static_cast<std::uint32_t>(j));
  }
}

void apply_precoding(const PrecodingSchedule& schedule, unsigned lanes, Span<std::uint64_t> rows) {
  if (lanes == 0 || lanes > kMaxLanes || (lanes & (lanes - 1)) != 0) {
    throw std::invalid_argument("lanes must be a power of two from 1 to 512");
  }
  if (lanes >= 64) {
    apply_to(schedule, WideRows{rows, lanes / 64});
  } else {
    apply_to(schedule, NarrowRows{rows, lanes});
  }
}

}  // namespace frostline
