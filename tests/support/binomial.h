// Whether a count of rare events is one that its probability explains.
#pragma once

#include <algorithm>
#include <boost/math/distributions/binomial.hpp>

namespace frostline::testing {

// The smaller of the probabilities that a binomial count is at most, and at least, this one.
inline double smaller_tail(double count, double trials, double probability) {
  const boost::math::binomial counts(trials, probability);
  const double at_least = count == 0 ? 1 : cdf(complement(counts, count - 1));
  return std::min(cdf(counts, count), at_least);
}

}  // namespace frostline::testing
