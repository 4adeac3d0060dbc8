// What a list decoder will fail at, as an estimate from measured savings.
//
// No closed formula tells the FER of a list. But the frozen count that it needs for a FER, beside
// the one that the union bound of successive cancellation asks for, is a smooth function of N, p,
// FER and L: the saving 1 - M_list / M_union falls about as a power of N and p, and hardly depends
// on the FER. So a table of measured savings (construct/list_saving_table.h) and interpolation of
// their logarithms give M within a fraction of a percent inside the table. kind "estimate".
#pragma once

#include <vector>

#include "polar/arithmetic.h"
#include "polar/block_length.h"
#include "polar/precoding.h"

namespace frostline {

// What the estimate depends on besides the FER.
struct ListSetting {
  BlockLength block_length;
  double qber;    // 0 < p < 0.5
  unsigned list;  // L, a power of two from 1 to 128
  Precoding precoding;
  Arithmetic arithmetic;  // savings are those of planes:3, and taken for exact and all planes
};

// 1 - M_list / M_union at a FER in (0, 1): 0 for L = 1, below 1 always. Beyond the table the
// logarithm of the saving goes on straight in log2 N, stays as it is in ln p, and grows by three
// quarters of the step before with each doubling of L; with the FER it changes by a factor a
// decade, down to FER 0.001. Throws std::invalid_argument outside the ranges, or where there is no
// estimate.
double list_saving(const ListSetting& setting, double fer);

// Estimated FER of the list decoder when the first M indices of a freezing order are frozen, for
// M = 0..N, from the union sums along that order (construct/selection.h): never increasing, at most
// 1. With L = 1 the sums themselves, at most 1. REQUIRES: N + 1 sums (std::invalid_argument
// otherwise).
std::vector<double> list_fer_estimates(const ListSetting& setting, const std::vector<double>& sums);

// Whether there is an estimate: with L = 1 always, for lists in exact arithmetic and in planes. The
// path metric of integers is not weighted and saves far less; how much was not measured.
bool has_list_estimate(const Arithmetic& arithmetic, unsigned list);

}  // namespace frostline
