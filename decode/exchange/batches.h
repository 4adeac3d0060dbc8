// Runs over the batches of a key: read in order, worked on in parallel, handed on in order.
//
// What the exchange's four steps share. One thread of its own reads and hands on, beside the
// workers (oneTBB), so that files and tags never keep a decoder waiting. Bounded memory whatever
// the key's length: only a few batches a worker are in flight, and their memory is used again.
#pragma once

#include <tbb/global_control.h>
#include <tbb/parallel_pipeline.h>

#include <algorithm>
#include <condition_variable>
#include <cstdint>
#include <deque>
#include <exception>
#include <memory>
#include <mutex>
#include <thread>
#include <vector>

#include "decode/exchange/cut.h"
#include "decode/exchange/key_files.h"
#include "decode/exchange/run_control.h"
#include "polar/bits.h"
#include "polar/error.h"
#include "polar/lanes.h"

namespace frostline {

// Batches between the thread that reads and hands on and the workers.
template <typename Work>
class BatchExchange {
 public:
  using Token = std::unique_ptr<Work>;

  BatchExchange(std::uint64_t total, std::size_t most_in_flight)
      : total_(total), most_in_flight_(most_in_flight) {}

  // The reading and handing on, until all is done or given up. read(i, Work&), hand_on(Work&).
  template <typename Read, typename HandOn>
  void serve(const RunControl& control, Read&& read, HandOn&& hand_on) {
    try {
      Token token;
      for (Step step = next_step(control, token); step != Step::end;
           step = next_step(control, token)) {
        if (step == Step::hand_on) {
          if (!control.stopped()) hand_on(*token);
          recycle(std::move(token));
        } else {
          read(next_++, *token);
          put(to_work_, std::move(token));
        }
      }
    } catch (...) {
      give_up(std::current_exception());
    }
  }

  // For the workers: the next batch, null when there is none any more.
  Token take() {
    std::unique_lock<std::mutex> lock(mutex_);
    changed_.wait(lock, [this] { return !to_work_.empty() || all_read_ || given_up_; });
    if (given_up_ || to_work_.empty()) return nullptr;
    return pop(to_work_);
  }
  void give_back(Token token) { put(done_, std::move(token)); }

  // Ends serve(); the first error is kept.
  void give_up(std::exception_ptr error) {
    const std::lock_guard<std::mutex> lock(mutex_);
    if (!error_) error_ = std::move(error);
    given_up_ = true;
    changed_.notify_all();
  }
  void rethrow_error() const {
    if (error_) std::rethrow_exception(error_);
  }

 private:
  enum class Step { read, hand_on, end };

  // What the serving thread does next, and with which batch. What is done goes first.
  Step next_step(const RunControl& control, Token& token) {
    std::unique_lock<std::mutex> lock(mutex_);
    while (true) {
      if (given_up_) return Step::end;
      if (!done_.empty()) {
        token = pop(done_);
        return Step::hand_on;
      }
      if (next_ == total_ || control.stopped()) {
        all_read_ = true;
        changed_.notify_all();
        if (in_flight_ == 0) return Step::end;
      } else if (in_flight_ < most_in_flight_) {
        ++in_flight_;
        token = free_.empty() ? std::make_unique<Work>() : pop(free_);
        return Step::read;
      }
      changed_.wait(lock);
    }
  }

  static Token pop(std::deque<Token>& queue) {
    Token token = std::move(queue.front());
    queue.pop_front();
    return token;
  }
  void put(std::deque<Token>& queue, Token token) {
    const std::lock_guard<std::mutex> lock(mutex_);
    queue.push_back(std::move(token));
    changed_.notify_all();
  }
  void recycle(Token token) {
    const std::lock_guard<std::mutex> lock(mutex_);
    --in_flight_;
    free_.push_back(std::move(token));
  }

  std::uint64_t total_;
  std::size_t most_in_flight_;
  std::uint64_t next_ = 0;
  std::mutex mutex_;
  std::condition_variable changed_;
  std::deque<Token> to_work_;
  std::deque<Token> done_;
  std::deque<Token> free_;
  std::size_t in_flight_ = 0;
  bool all_read_ = false;
  bool given_up_ = false;
  std::exception_ptr error_;
};

// Two for every worker and two for the thread beside them, but no more than hold 2^26 bits in all
// where that is more than one for each: a batch takes about eight times its bits.
inline std::size_t batches_in_flight(const Cut& cut, std::size_t workers) {
  constexpr std::uint64_t kMostBits = std::uint64_t{1} << 26;
  const std::uint64_t fit = kMostBits / (cut.block_length().bits() * cut.lanes());
  return static_cast<std::size_t>(
      std::clamp<std::uint64_t>(fit, workers + 1, std::uint64_t{2} * workers + 2));
}

// For each batch of the cut in order: read(batch, Work&) fills a Work that may hold what an earlier
// batch left; work(Work&) runs in parallel; hand_on(Work&) sees them in order. read and hand_on run
// on one thread, never at the same time. Work has a member `batch`, set before read. Throws
// Interrupted when control says so, and whatever the three throw.
template <typename Work, typename Read, typename Do, typename HandOn>
void run_batches(const Cut& cut, const RunControl& control, Read&& read, Do&& work,
                 HandOn&& hand_on) {
  using Token = typename BatchExchange<Work>::Token;
  const std::size_t workers =
      tbb::global_control::active_value(tbb::global_control::max_allowed_parallelism);
  BatchExchange<Work> exchange(cut.batch_count(), batches_in_flight(cut, workers));
  std::thread server([&] {
    exchange.serve(
        control,
        [&](std::uint64_t i, Work& token) {
          token.batch = cut.batch(i);
          read(token.batch, token);
        },
        [&](Work& token) {
          hand_on(token);
          if (control.progress) {
            control.progress(token.batch.first_block + token.batch.lanes, cut.block_count());
          }
        });
  });
  try {
    // std::function wants what it holds to be copied, so that tokens travel as plain pointers.
    tbb::parallel_pipeline(
        workers,
        tbb::make_filter<void, Work*>(tbb::filter_mode::serial_in_order,
                                      [&](tbb::flow_control& flow) -> Work* {
                                        Token token = exchange.take();
                                        if (token == nullptr) flow.stop();
                                        return token.release();
                                      }) &
            tbb::make_filter<Work*, Work*>(tbb::filter_mode::parallel,
                                           [&](Work* pointer) {
                                             Token token(pointer);
                                             if (!control.stopped()) work(*token);
                                             return token.release();
                                           }) &
            tbb::make_filter<Work*, void>(tbb::filter_mode::serial_in_order, [&](Work* pointer) {
              exchange.give_back(Token(pointer));
            }));
  } catch (...) {
    exchange.give_up(std::current_exception());
  }
  server.join();
  exchange.rethrow_error();
  if (control.stopped()) throw Interrupted();
}

// The bits of a batch as they lie in the key: rows of lanes.
inline void read_rows(const KeySource& key, const Cut& cut, const Batch& batch, KeyWords& rows) {
  const std::size_t bits = cut.block_length().bits() * batch.lanes;
  rows.resize(words_for(bits));
  key.read(batch.first_bit, bits, rows);
}

// The same bits block after block.
inline void rows_as_blocks(const KeyWords& rows, const Cut& cut, const Batch& batch,
                           KeyWords& blocks) {
  blocks.resize(rows.size());
  lanes_to_blocks(rows, cut.block_length(), batch.lanes, blocks);
}

// Blocks one after the other, packed to bytes; block `lane` is the bytes of packed_block.
inline void pack_blocks(const KeyWords& blocks, const Cut& cut, const Batch& batch,
                        KeyBytes& packed) {
  const std::size_t bits = cut.block_length().bits() * batch.lanes;
  packed.resize(bytes_for(bits));
  pack_bits(blocks, bits, packed);
}
inline Span<const std::uint8_t> packed_block(const KeyBytes& packed, const Cut& cut,
                                             unsigned lane) {
  const std::size_t bytes = cut.block_length().bits() / 8;
  return Span<const std::uint8_t>(packed).subspan(lane * bytes, bytes);
}

}  // namespace frostline
