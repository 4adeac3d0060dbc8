// One source for all targets of Google Highway: the file includes itself once for each.
#undef HWY_TARGET_INCLUDE
#define HWY_TARGET_INCLUDE "decode/list/list_decoder.cpp"  // NOLINT
#include <hwy/foreach_target.h>                            // IWYU pragma: keep
// After foreach_target.
#include <hwy/highway.h>

#include <algorithm>
#include <cstring>

#include "decode/list/list_decoder.h"

#include "decode/list/check_rows-inl.h"
#include "decode/list/small_nodes-inl.h"

#ifndef FROSTLINE_LIST_GROUP
#define FROSTLINE_LIST_GROUP
namespace frostline {

// Blocks that are decoded in step: 64 / L of each of kR rows.
struct ListGroup {
  // N/8 by kR 64/L bytes: the public values of 8 positions of a block each. Frozen nodes are
  // transformed in place. 64 readable bytes beyond the end.
  std::uint8_t* shown;
  // The check bits of the blocks: 3 by kR 64/L bytes, check bit 8k + t is bit t of byte k; 64
  // readable bytes beyond the end.
  const std::uint8_t* checks;
  // Room for scratch_bytes.
  std::uint8_t* scratch;
};

// Paths of kR rows: their sums, and messages of all levels below the root. 64 bytes a row.
inline std::size_t scratch_bytes(std::size_t bytes, unsigned rows) {
  // A row a byte for the sums, 3/4 for the second level below the root, 4/8 + 4/16 + ... below.
  return 64 * rows * (3 * bytes + 64);
}

}  // namespace frostline
#endif

HWY_BEFORE_NAMESPACE();
namespace frostline {
namespace HWY_NAMESPACE {

// Planes that a shape stores.
constexpr std::size_t StoredPlanes(Shape shape) {
  return static_cast<std::size_t>(MagnitudePlanes(shape)) + (HasSign(shape) ? 1 : 0);
}

// Messages lie row after row, the kR rows of a byte of positions side by side, the planes of a row
// next to each other. Those of shape fresh are not stored: they are the inverse of the sums of the
// left neighbour.
template <Shape kShape>
HWY_INLINE Message<Row> LoadMessage(const std::uint8_t* messages, std::size_t row) {
  Message<Row> message;
  if constexpr (kShape == Shape::fresh) {
    message.m[0] = Not(LoadRow(messages + row * kRowBytes));
  } else {
    const std::uint8_t* at = messages + row * (StoredPlanes(kShape) * kRowBytes);
    for (int k = 0; k < MagnitudePlanes(kShape); ++k, at += kRowBytes) message.m[k] = LoadRow(at);
    if constexpr (HasSign(kShape)) message.s = LoadRow(at);
  }
  return message;
}
template <Shape kShape>
HWY_INLINE void StoreMessage(const Message<Row>& message, std::uint8_t* messages, std::size_t row) {
  std::uint8_t* at = messages + row * (StoredPlanes(kShape) * kRowBytes);
  for (int k = 0; k < MagnitudePlanes(kShape); ++k, at += kRowBytes) StoreRow(message.m[k], at);
  if constexpr (HasSign(kShape)) StoreRow(message.s, at);
}
template <Shape kShape>
HWY_INLINE Message<Row> PermuteMessage(const Message<Row>& message, const Row& at,
                                       const PathTables& paths) {
  Message<Row> out;
  for (int k = 0; k < MagnitudePlanes(kShape); ++k) out.m[k] = Permute(message.m[k], at, paths);
  if constexpr (HasSign(kShape)) out.s = Permute(message.s, at, paths);
  return out;
}
// With all the planes that messages can have. Constant: magnitude 1.
template <Shape kShape, int kW>
HWY_INLINE Message<Row> Widened(Message<Row> message) {
  if constexpr (kShape == Shape::constant) message.m[0] = SetBytes(0xFF);
  if constexpr (!HasSign(kShape)) message.s = Zeros<512>();
  for (int k = std::max(1, MagnitudePlanes(kShape)); k < kW; ++k) message.m[k] = Zeros<512>();
  return message;
}

// Tables of state8 by nibbles of the state: A S, Y S, and the partial sums of Y S.
struct StateTables {
  StateTables() {
    for (unsigned nibble = 0; nibble < 16; ++nibble) {
      for (unsigned high = 0; high < 2; ++high) {
        const auto state = static_cast<std::uint8_t>(nibble << (4 * high));
        advance[high][nibble] = state8_advance(state, 0);
        offsets[high][nibble] = state8_offsets(state);
      }
    }
  }
  static HWY_INLINE Row Apply(const std::uint8_t (&table)[2][16], const Row& state) {
    return Xor(LookUp(table[0], LowNibbles(state)), LookUp(table[1], HighNibbles(state)));
  }
  alignas(16) std::uint8_t advance[2][16];
  alignas(16) std::uint8_t offsets[2][16];
};

// One group of blocks on its way through the tree.
template <int kW, unsigned kR>
class ListWalk {
 public:
  ListWalk(const ListProgram& program, const ListGroup& group)
      : program_(program),
        paths_(program.list),
        survivors_(paths_),
        small_(program, survivors_),
        log2_bytes_(program.log2_length - 3),
        blocks_(kRowBytes / program.list),
        shown_(group.shown),
        checks_(group.checks),
        sums_(group.scratch) {
    std::uint8_t* level = sums_ + kRowBytes * kR * program.bytes;
    // The first level below the root holds nothing that is stored, the second none with more than
    // three planes.
    for (unsigned k = log2_bytes_; k-- > 0;) {
      levels_[k] = level;
      if (k + 1 == log2_bytes_) continue;
      const std::size_t planes = k + 2 == log2_bytes_ ? 3 : 4;
      level += kRowBytes * kR * planes * (std::size_t{1} << k);
    }
  }

  // Decodes, and leaves the chosen error patterns in place of the public values.
  void Run() {
    Origin origin;
    Child<Shape::constant>(log2_bytes_, 0, nullptr, origin);
    Choose();
  }

 private:
  using Origin = Lineage<kR>;

  std::uint8_t* SumsAt(std::size_t byte) const { return sums_ + byte * kR * kRowBytes; }
  std::uint8_t* ShownAt(std::size_t byte) const { return shown_ + byte * kR * blocks_; }
  Row Shown(std::size_t byte, unsigned g) const {
    return Expand(ShownAt(byte) + g * blocks_, paths_);
  }

  // A node of 2^log2 bytes from byte first on, with its messages at `from`.
  template <Shape kShape>
  void Child(unsigned log2, std::size_t first, const std::uint8_t* from, Origin& origin) {
    switch (program_.node(log2, first)) {
      case ListNode::frozen:
        return Frozen<kShape>(log2, first, from);
      case ListNode::open:
        return Open<kShape>(log2, first, from, origin, false);
      case ListNode::open_forks:
        return Open<kShape>(log2, first, from, origin, true);
      default:
        if (log2 == 0) return Byte<kShape>(first, from, origin);
        return Mixed<kShape>(log2, first, from, origin);
    }
  }

  // A mixed node: first half, second half, and its sums.
  template <Shape kShape>
  void Mixed(unsigned log2, std::size_t first, const std::uint8_t* from, Origin& origin) {
    const std::size_t bytes = std::size_t{1} << (log2 - 1);
    const std::size_t half = bytes * kR;
    std::uint8_t* const child = levels_[log2 - 1];
    std::uint8_t* const left = SumsAt(first);
    std::uint8_t* const right = SumsAt(first + bytes);
    if constexpr (kShape != Shape::constant) {
      constexpr Shape kNext = AfterF(kShape);
      if (NeedsMessages(log2 - 1, first)) {
        for (std::size_t i = 0; i < half; ++i) {
          StoreMessage<kNext>(
              F<kShape>(LoadMessage<kShape>(from, i), LoadMessage<kShape>(from, half + i)), child,
              i);
        }
      }
    }
    Child<AfterF(kShape)>(log2 - 1, first, child, origin);

    Origin right_origin;
    if constexpr (kShape == Shape::constant) {
      Child<Shape::fresh>(log2 - 1, first + bytes, left, right_origin);
    } else {
      constexpr Shape kNext = AfterG<kW>(kShape);
      if (NeedsMessages(log2 - 1, first + bytes)) {
        if (origin.moved) {
          MakeRight<kShape, true>(half, from, left, child, origin);
        } else {
          MakeRight<kShape, false>(half, from, left, child, origin);
        }
      }
      Child<kNext>(log2 - 1, first + bytes, child, right_origin);
    }
    if (right_origin.moved) {
      for (std::size_t i = 0; i < half; i += kR) {
        for (unsigned g = 0; g < kR; ++g) {
          std::uint8_t* const at = left + (i + g) * kRowBytes;
          StoreRow(Xor(Permute(LoadRow(at), right_origin.at[g], paths_),
                       LoadRow(right + (i + g) * kRowBytes)),
                   at);
        }
      }
    } else {
      for (std::size_t i = 0; i < half; ++i) {
        std::uint8_t* const at = left + i * kRowBytes;
        StoreRow(Xor(LoadRow(at), LoadRow(right + i * kRowBytes)), at);
      }
    }
    origin.Then(right_origin, paths_);
  }

  template <Shape kShape, bool kMoved>
  void MakeRight(std::size_t half, const std::uint8_t* from, const std::uint8_t* left,
                 std::uint8_t* child, const Origin& origin) {
    constexpr Shape kNext = AfterG<kW>(kShape);
    for (std::size_t i = 0; i < half; i += kR) {
      for (unsigned g = 0; g < kR; ++g) {
        Message<Row> a = LoadMessage<kShape>(from, i + g);
        Message<Row> b = LoadMessage<kShape>(from, half + i + g);
        if constexpr (kMoved) {
          a = PermuteMessage<kShape>(a, origin.at[g], paths_);
          b = PermuteMessage<kShape>(b, origin.at[g], paths_);
        }
        StoreMessage<kNext>(G<kShape, kW>(a, b, LoadRow(left + (i + g) * kRowBytes)), child, i + g);
      }
    }
  }

  // A frozen node whose messages cannot tell paths apart needs none.
  bool NeedsMessages(unsigned log2, std::size_t first) const {
    return program_.node(log2, first) != ListNode::frozen ||
           (survivors_.lists() && program_.costs_of(log2 + 3, 8 * first).flip[1] != 0);
  }

  // In place: from public values to sums of a frozen node, but for what precoding adds.
  void TransformShown(unsigned log2, std::size_t first) {
    std::uint8_t* const shown = ShownAt(first);
    const std::size_t stride = kR * blocks_;
    const std::size_t size = stride << log2;
    for (std::size_t i = 0; i < size; ++i) {
      unsigned x = shown[i];
      x ^= (x >> 4) & 0x0FU;
      x ^= (x >> 2) & 0x33U;
      x ^= (x >> 1) & 0x55U;
      shown[i] = static_cast<std::uint8_t>(x);
    }
    for (std::size_t distance = stride; distance < size; distance *= 2) {
      for (std::size_t start = 0; start < size; start += 2 * distance) {
        std::uint8_t* const to = shown + start;
        const std::uint8_t* const add = to + distance;
        for (std::size_t i = 0; i < distance; ++i)
          to[i] = static_cast<std::uint8_t>(to[i] ^ add[i]);
      }
    }
  }

  template <Shape kShape>
  void Frozen(unsigned log2, std::size_t first, const std::uint8_t* from) {
    TransformShown(log2, first);
    const std::size_t bytes = std::size_t{1} << log2;
    const std::size_t last = first + bytes - 1;
    // What the state adds to the last byte of u is in all bytes of the sums.
    Row added[kR];
    for (unsigned g = 0; g < kR; ++g) {
      added[g] = Zeros<512>();
      if (program_.schedule.adds_state(last)) {
        added[g] = TransformBytes(StateTables::Apply(state_tables_.offsets, survivors_.state[g]));
      }
    }
    const bool costs = kShape != Shape::constant && NeedsMessages(log2, first);
    for (unsigned g = 0; g < kR; ++g) {
      if (!costs) {
        for (std::size_t i = 0; i < bytes; ++i) {
          StoreRow(Xor(Shown(first + i, g), added[g]), SumsAt(first + i) + g * kRowBytes);
        }
        continue;
      }
      if constexpr (kShape != Shape::constant) FrozenCosts<kShape>(log2, first, from, g, added[g]);
    }
  }

  template <Shape kShape>
  void FrozenCosts(unsigned log2, std::size_t first, const std::uint8_t* from, unsigned g,
                   const Row& added) {
    const WeightCosts& costs = program_.costs_of(log2 + 3, 8 * first);
    const std::size_t bytes = std::size_t{1} << log2;
    // Counts of at most 31 bytes of 8 positions fit a byte.
    constexpr std::size_t kChunk = 16;
    for (std::size_t start = 0; start < bytes; start += kChunk) {
      CostCounts counts;
      for (unsigned k = 0; k < kW; ++k) {
        counts.disagreement[k] = Zeros<512>();
        counts.correction[k] = Zeros<512>();
      }
      for (std::size_t i = start; i < std::min(bytes, start + kChunk); ++i) {
        const Row sums = Xor(Shown(first + i, g), added);
        StoreRow(sums, SumsAt(first + i) + g * kRowBytes);
        const Message<Row> message = Widened<kShape, kW>(LoadMessage<kShape>(from, i * kR + g));
        const Row disagrees = Xor(sums, message.s);
        Row small[3];
        SmallMagnitudes<kW>(message, small);
        for (unsigned k = 0; k < kW; ++k) {
          counts.disagreement[k] =
              Add(counts.disagreement[k], CountBits(And(disagrees, message.m[k])));
          counts.correction[k] = Add(counts.correction[k], CountBits(small[k]));
        }
      }
      AddCounts<kW>(survivors_, g, counts, costs);
    }
  }

  // Row by row; a later row's messages are moved by what happened in the earlier ones, and the sums
  // of the earlier ones by all that followed.
  template <Shape kShape>
  void Open(unsigned log2, std::size_t first, const std::uint8_t* from, Origin& origin,
            bool forks) {
    const std::size_t bytes = std::size_t{1} << log2;
    const WeightCosts& costs = program_.costs_of(log2 + 3, 8 * first);
    forks = forks && survivors_.lists() && (kShape != Shape::constant || log2 == 0);
    std::size_t settled = 0;
    for (std::size_t i = 0; i < bytes; ++i) {
      Message<Row> messages[kR];
      Row x[kR];
      for (unsigned g = 0; g < kR; ++g) {
        messages[g] = {};
        if constexpr (kShape != Shape::constant) {
          messages[g] = LoadMessage<kShape>(from, i * kR + g);
          if (origin.moved) {
            messages[g] = PermuteMessage<kShape>(messages[g], origin.at[g], paths_);
          }
        }
        messages[g] = Widened<kShape, kW>(messages[g]);
        x[g] = messages[g].s;
      }
      if (forks) {
        Origin step;
        small_.OpenRow(messages, 0xFF, costs, x, step);
        if (step.moved) {
          MoveSums(first, i, step);
          origin.Then(step, paths_);
        }
      }
      for (unsigned g = 0; g < kR; ++g) StoreRow(x[g], SumsAt(first + i) + g * kRowBytes);
      settled = i;
    }
    AdvanceStates(first + settled);
  }

  void MoveSums(std::size_t first, std::size_t bytes, const Origin& step) {
    for (std::size_t i = 0; i < bytes; ++i) {
      for (unsigned g = 0; g < kR; ++g) {
        std::uint8_t* const at = SumsAt(first + i) + g * kRowBytes;
        StoreRow(Permute(LoadRow(at), step.at[g], paths_), at);
      }
    }
  }

  // The state after a byte of u whose sums, or those of the node that ends there, have been stored:
  // its u depends on the last 8 sums alone.
  void AdvanceStates(std::size_t byte) {
    if (!program_.precoded || !program_.schedule.moves_state(byte)) return;
    const auto open = static_cast<std::uint8_t>(~unsigned{program_.schedule.frozen_places(byte)});
    for (unsigned g = 0; g < kR; ++g) {
      const Row u = TransformBytes(LoadRow(SumsAt(byte) + g * kRowBytes));
      survivors_.state[g] = Xor(StateTables::Apply(state_tables_.advance, survivors_.state[g]),
                                And(u, SetBytes(open)));
    }
  }

  template <Shape kShape>
  void Byte(std::size_t byte, const std::uint8_t* from, Origin& origin) {
    Message<Row> messages[kR];
    Row x[kR];
    for (unsigned g = 0; g < kR; ++g) {
      messages[g] = {};
      if constexpr (kShape != Shape::constant) messages[g] = LoadMessage<kShape>(from, g);
      messages[g] = Widened<kShape, kW>(messages[g]);
      survivors_.shown[g] = Shown(byte, g);
      if (program_.schedule.adds_state(byte)) {
        survivors_.shown[g] = Xor(
            survivors_.shown[g], And(StateTables::Apply(state_tables_.offsets, survivors_.state[g]),
                                     SetBytes(program_.schedule.frozen_places(byte))));
      }
    }
    small_.template Byte<kShape == Shape::constant>(byte, messages, x, origin);
    for (unsigned g = 0; g < kR; ++g) StoreRow(x[g], SumsAt(byte) + g * kRowBytes);
    AdvanceStates(byte);
  }

  // The best path of each block whose check bits are the given ones, the best of all where none has
  // them; of equals the lower path.
  void Choose() {
    std::uint64_t agree[kR] = {};
    if (survivors_.lists() && program_.check_bits != 0) CompareChecks(agree);
    alignas(64) std::uint8_t chosen[kR][kRowBytes] = {};
    for (unsigned g = 0; g < kR; ++g) {
      alignas(64) std::uint8_t metric[kRowBytes];
      StoreRow(survivors_.metric[g], metric);
      for (unsigned b = 0; b < blocks_; ++b) {
        unsigned best = b * paths_.list;
        for (unsigned slot = best + 1; slot < (b + 1) * paths_.list; ++slot) {
          const bool was = (agree[g] >> best) & 1U;
          const bool is = (agree[g] >> slot) & 1U;
          if (is != was ? is : metric[slot] < metric[best]) best = slot;
        }
        chosen[g][b] = static_cast<std::uint8_t>(best);
      }
    }
    for (std::size_t byte = 0; byte < program_.bytes; ++byte) {
      std::uint8_t* const to = ShownAt(byte);
      for (unsigned g = 0; g < kR; ++g) {
        const std::uint8_t* const row = SumsAt(byte) + g * kRowBytes;
#if HWY_TARGET == HWY_AVX3_DL
        const __m512i bytes =
            _mm512_permutexvar_epi8(_mm512_load_si512(chosen[g]), _mm512_load_si512(row));
        _mm512_mask_storeu_epi8(to + g * blocks_, ~std::uint64_t{0} >> (kRowBytes - blocks_),
                                bytes);
#else
        for (unsigned b = 0; b < blocks_; ++b) to[g * blocks_ + b] = row[chosen[g][b]];
#endif
      }
    }
  }

  // agree[g]: bit i for byte i of row g.
  void CompareChecks(std::uint64_t* agree) const {
    const CheckTables tables(program_.check_bits);
    CheckRegister check[kR];
    for (unsigned g = 0; g < kR; ++g) {
      for (Row& byte : check[g].byte) byte = Zeros<512>();
    }
    for (std::size_t byte = 0; byte < program_.bytes; ++byte) {
      for (unsigned g = 0; g < kR; ++g) {
        check[g].Take(LoadRow(SumsAt(byte) + g * kRowBytes), tables);
      }
    }
    for (unsigned g = 0; g < kR; ++g) {
      Row differs = Zeros<512>();
      for (unsigned k = 0; k < 3; ++k) {
        const Row given = Expand(checks_ + (k * kR + g) * blocks_, paths_);
        differs = Or(differs, Xor(given, check[g].byte[k]));
      }
      agree[g] = MaskBits(IsZero(differs));
    }
  }

  const ListProgram& program_;
  const PathTables paths_;
  const StateTables state_tables_;
  Survivors<kR> survivors_;
  SmallNodes<kW, kR> small_;
  unsigned log2_bytes_;
  unsigned blocks_;  // of a row
  std::uint8_t* shown_;
  const std::uint8_t* checks_;
  std::uint8_t* sums_;
  std::uint8_t* levels_[BlockLength::kMaxLog2] = {};
};

// Rows side by side hide the latency of a fork; where a row is several vectors, two are enough.
unsigned MostRows(unsigned planes) { return kRowParts == 1 && planes == 3 ? 4 : 2; }

void DecodeGroup(const ListProgram& program, unsigned rows, const ListGroup& group) {
  if (program.planes == 2) {
    ListWalk<2, 2>(program, group).Run();
    return;
  }
  if constexpr (kRowParts == 1) {
    if (rows == 4) {
      ListWalk<3, 4>(program, group).Run();
      return;
    }
  }
  ListWalk<3, 2>(program, group).Run();
}

}  // namespace HWY_NAMESPACE
}  // namespace frostline
HWY_AFTER_NAMESPACE();

#if HWY_ONCE
#include <stdexcept>

#include "polar/lanes.h"
#include "polar/transform.h"

namespace frostline {

HWY_EXPORT(MostRows);
HWY_EXPORT(DecodeGroup);

namespace {

// Transposes 8 words of 8 bytes: byte b of word a is exchanged with byte a of word b.
void transpose_bytes(std::uint64_t (&words)[8]) {
  constexpr std::uint64_t kLower[3] = {0x00FF00FF00FF00FFU, 0x0000FFFF0000FFFFU,
                                       0x00000000FFFFFFFFU};
  for (unsigned k = 0; k < 3; ++k) {
    const unsigned distance = 1U << k;
    const unsigned shift = 8U << k;
    for (unsigned i = 0; i < 8; ++i) {
      if ((i & distance) != 0) continue;
      const std::uint64_t swapped = ((words[i] >> shift) ^ words[i + distance]) & kLower[k];
      words[i + distance] ^= swapped;
      words[i] ^= swapped << shift;
    }
  }
}

// An array of bytes, a block a row, to one of a block a column.
struct ByteMatrix {
  std::uint8_t* bytes;
  std::size_t stride;
};
void transpose(const ByteMatrix& from, std::size_t rows, std::size_t columns,
               const ByteMatrix& to) {
  for (std::size_t row = 0; row < rows; row += 8) {
    for (std::size_t column = 0; column < columns; column += 8) {
      const std::size_t height = std::min<std::size_t>(8, rows - row);
      const std::size_t width = std::min<std::size_t>(8, columns - column);
      std::uint64_t words[8] = {};
      if (height == 8 && width == 8) {
        for (std::size_t i = 0; i < 8; ++i) {
          std::memcpy(&words[i], from.bytes + (row + i) * from.stride + column, 8);
        }
        transpose_bytes(words);
        for (std::size_t i = 0; i < 8; ++i) {
          std::memcpy(to.bytes + (column + i) * to.stride + row, &words[i], 8);
        }
        continue;
      }
      for (std::size_t i = 0; i < height; ++i) {
        std::memcpy(&words[i], from.bytes + (row + i) * from.stride + column, width);
      }
      transpose_bytes(words);
      for (std::size_t i = 0; i < width; ++i) {
        std::memcpy(to.bytes + (column + i) * to.stride + row, &words[i], height);
      }
    }
  }
}

// Check bit 8k + t of block first + l to bit t of byte k count + l.
void checks_to_group(const BatchDifference& difference, unsigned width, std::size_t first,
                     std::size_t present, std::size_t count, std::uint8_t* group) {
  for (std::size_t t = 0; t < width; ++t) {
    for (std::size_t l = 0; l < present; ++l) {
      const std::size_t bit = t * difference.lanes + first + l;
      const auto value = static_cast<unsigned>((difference.checks[bit / 64] >> (bit % 64)) & 1U);
      std::uint8_t& to = group[t / 8 * count + l];
      to = static_cast<std::uint8_t>(to | (value << (t % 8)));
    }
  }
}

}  // namespace

bool ListDecoder::serves(const Arithmetic& arithmetic, unsigned list) {
  return arithmetic.kind == Arithmetic::Kind::planes &&
         (arithmetic.planes == 2 || arithmetic.planes == 3) && list >= 1 &&
         list <= kLargestFastList && (list & (list - 1)) == 0;
}

ListDecoder::ListDecoder(const Code& code, const Arithmetic& arithmetic, unsigned list,
                         const MetricWeights* weights)
    : program_((serves(arithmetic, list) &&
                (list == 1 || (weights != nullptr && weights->block_length == code.block_length())))
                   ? ListProgram(code, weights, arithmetic.planes, list)
                   : throw std::invalid_argument("no such list decoder, or one without the metric "
                                                 "weights of its length")) {}

void ListDecoder::decode(const BatchDifference& difference, Span<std::uint64_t> error_rows) const {
  const unsigned lanes = difference.lanes;
  if (lanes == 0 || lanes > kMaxLanes || (lanes & (lanes - 1)) != 0) {
    throw std::invalid_argument("lanes must be a power of two from 1 to 512");
  }
  const BlockLength length = BlockLength::from_log2(program_.log2_length);
  const std::size_t words = words_for(length.bits() * lanes);
  if (difference.rows.size() != words || error_rows.size() != words ||
      (program_.list > 1 &&
       difference.checks.size() < words_for(std::size_t{program_.check_bits} * lanes))) {
    throw std::invalid_argument("a batch of another size");
  }
  const std::size_t blocks_a_row = 64 / program_.list;
  const unsigned most_rows = HWY_DYNAMIC_DISPATCH(MostRows)(program_.planes);
  const unsigned rows = lanes >= most_rows * blocks_a_row ? most_rows : 2;
  const std::size_t count = rows * blocks_a_row;
  const std::size_t bytes = program_.bytes;

  Scratch& kept = scratch_.local();
  KeyBytes& scratch = kept.group;
  const std::size_t shown_bytes = (bytes * count + 127) / 64 * 64;
  scratch.resize(scratch_bytes(bytes, rows) + shown_bytes);
  KeyWords& blocks = kept.blocks;
  blocks.resize(words);
  lanes_to_blocks(difference.rows, length, lanes, blocks);
  auto* const block_bytes = reinterpret_cast<std::uint8_t*>(blocks.data());
  for (std::size_t first = 0; first < lanes; first += count) {
    const std::size_t present = std::min<std::size_t>(count, lanes - first);
    if (present < count) std::fill_n(scratch.data(), shown_bytes, std::uint8_t{0});
    transpose({block_bytes + first * bytes, bytes}, present, bytes, {scratch.data(), count});
    KeyBytes& checks = kept.checks;
    checks.assign(3 * count + 64, 0);
    if (program_.list > 1) {
      checks_to_group(difference, program_.check_bits, first, present, count, checks.data());
    }
    HWY_DYNAMIC_DISPATCH(DecodeGroup)
    (program_, rows, {scratch.data(), checks.data(), scratch.data() + shown_bytes});
    transpose({scratch.data(), count}, bytes, present, {block_bytes + first * bytes, bytes});
  }
  blocks_to_lanes(blocks, length, lanes, error_rows);
}

}  // namespace frostline
#endif  // HWY_ONCE
