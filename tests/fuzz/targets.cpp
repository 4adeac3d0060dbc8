#include "tests/fuzz/targets.h"

#include <algorithm>
#include <string>
#include <string_view>

#include "decode/exchange/message.h"
#include "decode/exchange/receipt.h"
#include "decode/lanes/lane_decoder.h"
#include "decode/reference/reference_batch_decoder.h"
#include "polar/design.h"
#include "polar/error.h"
#include "polar/simd.h"
#include "tests/fuzz/fuzz_input.h"
#include "tests/support/random_bits.h"

namespace frostline::fuzz {
namespace {

// Runs of frozen and open indices, or single ones, as the input says.
FrozenSet frozen_set(FuzzInput& input, BlockLength block_length) {
  BitString mask(block_length.bits());
  for (std::size_t i = 0; i < mask.size();) {
    const unsigned choice = input.byte();
    const std::size_t run =
        std::min<std::size_t>(mask.size() - i, std::size_t{1} << ((choice >> 1) % 8));
    if ((choice & 0x80U) != 0) {
      for (std::size_t k = 0; k < run; ++k) mask.set(i + k, (choice & 1U) != 0);
    } else {
      const std::uint64_t word = input.word();
      for (std::size_t k = 0; k < run; ++k) mask.set(i + k, ((word >> (k % 64)) & 1U) != 0);
    }
    i += run;
  }
  return FrozenSet(block_length, std::move(mask));
}

// Difference bits at the frozen indices.
KeyWords difference_of(FuzzInput& input, const FrozenSet& frozen, unsigned lanes) {
  KeyWords rows(words_for(frozen.block_length().bits() * lanes));
  for (const FrozenSet::Run& run : frozen.runs()) {
    BitString bits(std::size_t{run.count} * lanes);
    for (std::uint64_t& word : bits.words()) word = input.left() > 0 ? input.word() : 0;
    copy_bits(bits.words(), 0, rows, std::size_t{run.first} * lanes, bits.size());
  }
  return rows;
}

std::string_view text_of(const std::uint8_t* data, std::size_t size) {
  return {reinterpret_cast<const char*>(data), size};
}

// Whether `read` reads; InputError is the only other way that it may end.
template <typename Read>
bool reads(Read&& read) {
  try {
    read();
    return true;
  } catch (const InputError&) {
    return false;
  }
}

}  // namespace

void lane_decoder(const std::uint8_t* data, std::size_t size) {
  FuzzInput input(data, size);
  const unsigned log2 = 3 + input.below(9);
  unsigned lanes = 1U << input.below(10);
  while ((std::size_t{lanes} << log2) > (std::size_t{1} << 14)) lanes /= 2;
  const unsigned planes = 2 + input.below(2);
  const BlockLength block_length = BlockLength::from_log2(log2);
  const Code code{frozen_set(input, block_length), Precoding::none, 0};
  const KeyWords difference = difference_of(input, code.frozen, lanes);

  const Arithmetic arithmetic = Arithmetic::planes_of(planes);
  KeyWords expected(difference.size());
  ReferenceBatchDecoder(code, arithmetic, 0.05).decode({lanes, difference, {}}, expected);
  const LaneDecoder fast(code, arithmetic);
  for (const std::string& name : simd_names()) {
    force_simd(name);
    KeyWords found(difference.size(), ~std::uint64_t{0});
    fast.decode({lanes, difference, {}}, found);
    require(found == expected, "the lane decoder equals the reference");
  }
  reset_simd();
}

void design_file(const std::uint8_t* data, std::size_t size) {
  Design design{
      {FrozenSet(BlockLength(8), BitString(8)), Precoding::none, 0}, 0, {}, 1, {}, {}, {}, {}, {}};
  if (!reads([&] { design = design_from_json(text_of(data, size), "fuzz"); })) return;
  const std::string written = design_to_json(design);
  require(design_to_json(design_from_json(written, "fuzz")) == written,
          "a design file that was read is written and read again without a change");
}

// The first byte says whether the bytes are a message, or where to alter one that is whole.
void message(const std::uint8_t* data, std::size_t size) {
  const Code code{testing::weight_frozen_set(BlockLength(64), 20), Precoding::none, 8};
  FuzzInput input(data, size);
  const bool whole = (input.byte() & 1U) != 0;
  MemorySink sink;
  if (whole) {
    MessageHeader header;
    header.code = code_sha256(code);
    header.block_length = 64;
    header.lanes = 1U << input.below(4);
    header.key_bits = 64 * (1 + input.below(20));
    header.check_bits = 8;
    MessageWriter writer(sink, header);
    const Cut cut(BlockLength(64), header.key_bits, header.lanes);
    for (std::uint64_t i = 0; i < cut.batch_count(); ++i) {
      const unsigned lanes = cut.batch(i).lanes;
      writer.write(lanes, {BitString(std::size_t{20} * lanes), BitString(std::size_t{8} * lanes)});
    }
    writer.finish();
  } else {
    sink.write({input.rest(), input.left()});
  }
  KeyBytes bytes = sink.bytes();
  unsigned input_changes = 0;
  while (whole && input.left() >= 9) {
    ++input_changes;
    const std::size_t place = input.word() % bytes.size();
    const std::uint8_t change = input.byte();
    bytes[place] = static_cast<std::uint8_t>(bytes[place] ^ change);
  }
  const bool untouched = bytes == sink.bytes();
  MemorySource source(bytes, "fuzz");
  const bool read = reads([&] {
    MessageReader reader(source, code);
    for (std::uint64_t i = 0; i < reader.cut().batch_count(); ++i) reader.next();
    reader.finish();
  });
  if (whole && untouched) require(read, "a whole message is read");
  // A CRC-32C finds every change within 32 bits in a row, and so one of a single byte.
  if (whole && !untouched && input_changes == 1) require(!read, "an altered message is refused");
}

void receipt(const std::uint8_t* data, std::size_t size) {
  Receipt receipt;
  if (!reads([&] { receipt = receipt_from_json(text_of(data, size), "fuzz"); })) return;
  const std::string written = receipt_to_json(receipt);
  require(receipt_to_json(receipt_from_json(written, "fuzz")) == written,
          "a receipt that was read is written and read again without a change");
}

void verdict(const std::uint8_t* data, std::size_t size) {
  Verdict verdict;
  if (!reads([&] { verdict = verdict_from_json(text_of(data, size), "fuzz"); })) return;
  const std::string written = verdict_to_json(verdict);
  require(verdict_to_json(verdict_from_json(written, "fuzz")) == written,
          "a verdict that was read is written and read again without a change");
}

}  // namespace frostline::fuzz
