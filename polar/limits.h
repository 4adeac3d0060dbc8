// What no one-way code can beat: the finite-length limit of reconciliation on a BSC, and h2.
#pragma once

#include <cstdint>

namespace frostline {

// Binary entropy in bits. REQUIRES: 0 <= p <= 1. h2(0) = h2(1) = 0.
double binary_entropy(double p);

// Throws InputError unless 0 < p < 0.5; what names the quantity ("QBER").
void require_error_rate(double p, const char* what);
// Throws InputError unless 0 < value < 1.
void require_probability(double value, const char* what);

struct FiniteLengthLimit {
  std::uint64_t bits;        // least number of public bits, exact
  double efficiency;         // bits / (N h2(p))
  double second_order_bits;  // N h2 + sqrt(N V) Qinv(fer) - log2(N) / 2
};

// A one-way message of fixed length that lets blocks of N independent bits, each 1 with probability
// p, be told apart but for a probability of failure fer is a fixed-length source code: the best one
// keeps the most probable patterns, and needs ceil(log2(number kept)) bits, counted here exactly.
// Second order: V. Strassen, 1962; for reconciliation M. Tomamichel, J. Martinez-Mateo, C. Pacher,
// D. Elkouss, Quantum Inf. Process. 16, 280, 2017; V = p (1-p) log2^2((1-p)/p).
// Ranges: 1 <= length <= 2^32, 0 < p < 0.5, 0 < fer < 1 (InputError otherwise). Takes
// O(sqrt(length)) steps. bits is exact unless log2(number kept) lies within 1e-6 of an integer.
FiniteLengthLimit finite_length_limit(std::uint64_t length, double p, double fer);

}  // namespace frostline
