#include "decode/trial/channel.h"

#include <algorithm>
#include <array>
#include <charconv>
#include <cmath>
#include <vector>

#include "polar/error.h"

namespace frostline {
namespace {

// The shortest decimal text of a number.
std::string text_of(double value) {
  std::array<char, 32> digits;
  const auto end = std::to_chars(digits.data(), digits.data() + digits.size(), value).ptr;
  return {digits.data(), end};
}

void require_error_probability(double p, const std::string& what) {
  if (!(p >= 0 && p <= 0.5)) {
    throw InputError(what + ": error rate " + text_of(p) + " is outside 0 .. 0.5");
  }
}

void require_change_probability(double p) {
  if (!(p > 0 && p <= 1)) {
    throw InputError("burst: probability of change " + text_of(p) + " is not above 0 and up to 1");
  }
}

// First one at or after position `from`, or `bits` where there is none.
std::size_t next_one(Span<const std::uint64_t> words, std::size_t from, std::size_t bits) {
  if (from >= bits) return bits;
  std::uint64_t word = words[from / 64] >> (from % 64) << (from % 64);
  std::size_t index = from / 64;
  while (word == 0) {
    if (64 * ++index >= bits) return bits;
    word = words[index];
  }
  return std::min(bits, 64 * index + static_cast<std::size_t>(__builtin_ctzll(word)));
}

void fill_ones(Span<std::uint64_t> words, std::size_t from, std::size_t to) {
  while (from < to) {
    const std::size_t count = std::min<std::size_t>(64 - from % 64, to - from);
    const std::uint64_t ones = count == 64 ? ~std::uint64_t{0} : (std::uint64_t{1} << count) - 1;
    words[from / 64] |= ones << (from % 64);
    from += count;
  }
}

}  // namespace

SymmetricChannel::SymmetricChannel(double p) : p_(p) { require_error_probability(p, "bsc"); }

void SymmetricChannel::draw(std::uint64_t seed, const Stretch& stretch,
                            Span<std::uint64_t> errors) const {
  RandomStream(seed, "trial errors", stretch.first_block).bernoulli(p_, stretch.bits(), errors);
}

std::string SymmetricChannel::name() const { return "bsc:" + text_of(p_); }

DriftingChannel::DriftingChannel(double low, double high, std::uint64_t period)
    : low_(low), high_(high), period_(period) {
  require_error_probability(low, "drift");
  require_error_probability(high, "drift");
  if (low > high) {
    throw InputError("drift: the low error rate " + text_of(low) + " is above the high one, " +
                     text_of(high));
  }
  if (period < 2 || period > (std::uint64_t{1} << 32)) {
    throw InputError("drift: a period of " + std::to_string(period) +
                     " blocks is not from 2 to 2^32");
  }
}

double DriftingChannel::qber_at(std::uint64_t block) const {
  const double phase = static_cast<double>(block % period_) / static_cast<double>(period_);
  return low_ + (high_ - low_) * (1 - std::abs(2 * phase - 1));
}

void DriftingChannel::draw(std::uint64_t seed, const Stretch& stretch,
                           Span<std::uint64_t> errors) const {
  const std::size_t length = stretch.block_length.bits();
  std::fill(errors.begin(), errors.end(), 0);
  KeyWords step(words_for(length));
  for (unsigned k = 0; k < stretch.lanes; ++k) {
    const std::uint64_t block = stretch.first_block + k;
    RandomStream(seed, "trial drift", block).bernoulli(qber_at(block), length, step);
    copy_bits(step, 0, errors, length * k, length);
  }
}

std::string DriftingChannel::name() const {
  return "drift:" + text_of(low_) + ':' + text_of(high_) + ':' + std::to_string(period_);
}

BurstChannel::BurstChannel(double p_good, double p_bad, double to_bad, double to_good)
    : p_good_(p_good), p_bad_(p_bad), to_bad_(to_bad), to_good_(to_good) {
  require_error_probability(p_good, "burst");
  require_error_probability(p_bad, "burst");
  require_change_probability(to_bad);
  require_change_probability(to_good);
}

double BurstChannel::mean_qber() const { return p_good_ + bad_share() * (p_bad_ - p_good_); }

// Rows of what would happen in either state, and the state picks from them: no step a position.
void BurstChannel::draw(std::uint64_t seed, const Stretch& stretch,
                        Span<std::uint64_t> errors) const {
  const std::size_t bits = stretch.bits();
  RandomStream states(seed, "trial burst states", stretch.first_block);
  bool bad = states.uniform() < bad_share();
  KeyWords leaves_good(errors.size());
  KeyWords leaves_bad(errors.size());
  states.bernoulli(to_bad_, bits, leaves_good);
  states.bernoulli(to_good_, bits, leaves_bad);
  KeyWords in_bad(errors.size(), 0);
  for (std::size_t from = 0; from < bits; bad = !bad) {
    const std::size_t last = next_one(bad ? leaves_bad : leaves_good, from, bits);
    const std::size_t to = std::min(bits, last + 1);
    if (bad) fill_ones(in_bad, from, to);
    from = to;
  }
  RandomStream random(seed, "trial burst errors", stretch.first_block);
  KeyWords of_bad(errors.size());
  random.bernoulli(p_good_, bits, errors);
  random.bernoulli(p_bad_, bits, of_bad);
  for (std::size_t w = 0; w < errors.size(); ++w) {
    errors[w] = (errors[w] & ~in_bad[w]) | (of_bad[w] & in_bad[w]);
  }
}

std::string BurstChannel::name() const {
  return "burst:" + text_of(p_good_) + ':' + text_of(p_bad_) + ':' + text_of(to_bad_) + ':' +
         text_of(to_good_);
}

CapturedChannel::CapturedChannel(std::unique_ptr<KeySource> a, std::unique_ptr<KeySource> b)
    : a_(std::move(a)), b_(std::move(b)) {
  if (a_->bits() != b_->bits()) {
    throw InputError("'" + a_->name() + "' holds " + std::to_string(a_->bits()) + " bits and '" +
                     b_->name() + "' " + std::to_string(b_->bits()) +
                     ": captured strings must be of the same length");
  }
  constexpr std::size_t kPiece = std::size_t{1} << 23;
  KeyWords errors(words_for(kPiece));
  std::uint64_t differ = 0;
  for (std::uint64_t first = 0; first < a_->bits(); first += kPiece) {
    const auto count =
        static_cast<std::size_t>(std::min<std::uint64_t>(kPiece, a_->bits() - first));
    errors.resize(words_for(count));
    differences(first, count, errors);
    differ += count_ones(errors);
  }
  qber_ = static_cast<double>(differ) / static_cast<double>(a_->bits());
  if (differ == 0 || qber_ >= 0.5) {
    throw InputError("'" + a_->name() + "' and '" + b_->name() + "' differ in " +
                     std::to_string(differ) + " of " + std::to_string(a_->bits()) +
                     " bits: nothing that a design can be tried against");
  }
}

void CapturedChannel::differences(std::uint64_t first, std::size_t count,
                                  Span<std::uint64_t> errors) const {
  KeyWords other(errors.size());
  a_->read(first, count, errors);
  b_->read(first, count, other);
  for (std::size_t w = 0; w < errors.size(); ++w) errors[w] ^= other[w];
}

void CapturedChannel::draw(std::uint64_t, const Stretch& stretch,
                           Span<std::uint64_t> errors) const {
  differences(stretch.first_block * stretch.block_length.bits(), stretch.bits(), errors);
}

std::string CapturedChannel::name() const { return "file:" + a_->name() + ':' + b_->name(); }

namespace {

using Words = std::vector<std::string>;

Words split(std::string_view text) {
  Words words(1);
  for (const char c : text) {
    if (c == ':') {
      words.emplace_back();
    } else {
      words.back() += c;
    }
  }
  return words;
}

template <typename Number>
Number parse_part(const std::string& word, const std::string& whole) {
  Number value{};
  const char* const end = word.data() + word.size();
  const auto parsed = std::from_chars(word.data(), end, value);
  if (parsed.ec != std::errc() || parsed.ptr != end) {
    throw InputError("channel '" + whole + "': '" + word + "' is not a number");
  }
  return value;
}

std::unique_ptr<Channel> make_channel(const std::string& whole, const Words& words,
                                      KeyFormat format, std::optional<std::uint64_t> bits) {
  const auto number = [&](std::size_t k) { return parse_part<double>(words[k], whole); };
  if (words[0] == "bsc" && words.size() == 2) return std::make_unique<SymmetricChannel>(number(1));
  if (words[0] == "drift" && words.size() == 4) {
    return std::make_unique<DriftingChannel>(number(1), number(2),
                                             parse_part<std::uint64_t>(words[3], whole));
  }
  if (words[0] == "burst" && words.size() == 5) {
    return std::make_unique<BurstChannel>(number(1), number(2), number(3), number(4));
  }
  if (words[0] == "file" && words.size() == 3) {
    return std::make_unique<CapturedChannel>(open_key(words[1], format, bits),
                                             open_key(words[2], format, bits));
  }
  throw InputError("channel '" + whole +
                   "' is not bsc:P, drift:LOW:HIGH:PERIOD, burst:P_GOOD:P_BAD:TO_BAD:TO_GOOD or "
                   "file:A:B");
}

}  // namespace

std::unique_ptr<Channel> parse_channel(std::string_view text, KeyFormat format,
                                       std::optional<std::uint64_t> bits) {
  return make_channel(std::string(text), split(text), format, bits);
}

}  // namespace frostline
