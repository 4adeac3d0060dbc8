// Channels: where the errors of a trial come from.
//
// A channel acts on the sifted string in the order of time. A trial cuts that string as the
// exchange does (decode/exchange/cut.h): the lanes of a batch take every B-th position, so that a
// burst or a stretch of high QBER is shared by the B blocks of a batch. Whatever a channel draws is
// a function of the seed and of the batch alone, never of threads or of what was drawn before.
#pragma once

#include <cstdint>
#include <limits>
#include <memory>
#include <string>
#include <string_view>

#include "decode/exchange/key_files.h"
#include "polar/bits.h"
#include "polar/block_length.h"
#include "polar/random.h"

namespace frostline {

// N lanes positions of the sifted string that follow each other, the first of them that of block
// first_block.
struct Stretch {
  BlockLength block_length;
  std::uint64_t first_block;
  unsigned lanes;

  std::size_t bits() const { return block_length.bits() * lanes; }
};

class Channel {
 public:
  virtual ~Channel() = default;
  // Sets bit i of errors where position i of the stretch differs, and the pad bits of the last word
  // to 0. Safe to call from many threads at once. REQUIRES: words_for(stretch.bits()) words, and a
  // stretch that ends within available_bits().
  virtual void draw(std::uint64_t seed, const Stretch& stretch,
                    Span<std::uint64_t> errors) const = 0;
  // Share of positions that differ in the long run, or in all of a capture: 0 to 0.5.
  virtual double mean_qber() const = 0;
  // As the user writes it: "bsc:0.02".
  virtual std::string name() const = 0;
  // Positions that it can serve.
  virtual std::uint64_t available_bits() const { return kEndless; }

  static constexpr std::uint64_t kEndless = std::numeric_limits<std::uint64_t>::max();
};

// bsc:P. Independent errors of one probability, 0 <= p <= 0.5 (InputError otherwise).
class SymmetricChannel : public Channel {
 public:
  explicit SymmetricChannel(double p);
  void draw(std::uint64_t seed, const Stretch& stretch, Span<std::uint64_t> errors) const override;
  double mean_qber() const override { return p_; }
  std::string name() const override;

 private:
  double p_;
};

// drift:LOW:HIGH:PERIOD. Independent errors whose probability wanders: it rises straight from low
// to high and falls back once in `period` blocks of time, in steps of a block length; the trial
// begins at low. 0 <= low <= high <= 0.5 and 2 <= period <= 2^32 (InputError otherwise).
class DriftingChannel : public Channel {
 public:
  DriftingChannel(double low, double high, std::uint64_t period);
  void draw(std::uint64_t seed, const Stretch& stretch, Span<std::uint64_t> errors) const override;
  double mean_qber() const override { return (low_ + high_) / 2; }
  std::string name() const override;
  // Error probability in the block-th block length of the sifted string.
  double qber_at(std::uint64_t block) const;

 private:
  double low_;
  double high_;
  std::uint64_t period_;
};

// burst:P_GOOD:P_BAD:TO_BAD:TO_GOOD. Two states with their own error probabilities, which change
// after a position with the given probabilities (E. N. Gilbert, Bell Syst. Tech. J. 39, 1960;
// E. O. Elliott, Bell Syst. Tech. J. 42, 1963). Each batch starts in a state drawn from the
// stationary distribution. Error probabilities from 0 to 0.5, of change above 0 and at most 1
// (InputError otherwise).
class BurstChannel : public Channel {
 public:
  BurstChannel(double p_good, double p_bad, double to_bad, double to_good);
  void draw(std::uint64_t seed, const Stretch& stretch, Span<std::uint64_t> errors) const override;
  double mean_qber() const override;
  std::string name() const override;

 private:
  double bad_share() const { return to_bad_ / (to_bad_ + to_good_); }

  double p_good_;
  double p_bad_;
  double to_bad_;
  double to_good_;
};

// file:A:B. The positions at which two captured strings differ, once through; the seed plays no
// part. Throws InputError when they are not of the same length, do not differ, or differ in half of
// their positions or more.
class CapturedChannel : public Channel {
 public:
  CapturedChannel(std::unique_ptr<KeySource> a, std::unique_ptr<KeySource> b);
  void draw(std::uint64_t seed, const Stretch& stretch, Span<std::uint64_t> errors) const override;
  double mean_qber() const override { return qber_; }
  std::string name() const override;
  std::uint64_t available_bits() const override { return a_->bits(); }

 private:
  void differences(std::uint64_t first, std::size_t count, Span<std::uint64_t> errors) const;

  std::unique_ptr<KeySource> a_;
  std::unique_ptr<KeySource> b_;
  double qber_ = 0;
};

// A channel from its text: one of the four above. format and bits: of captured strings. Throws
// InputError that says what is wrong with which part.
std::unique_ptr<Channel> parse_channel(std::string_view text, KeyFormat format = KeyFormat::packed,
                                       std::optional<std::uint64_t> bits = std::nullopt);

}  // namespace frostline
