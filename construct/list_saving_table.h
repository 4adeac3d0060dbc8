// What a list saves, measured: 1 - M of list decoding / M of the union bound, both for the same
// FER.
//
// planes:3, precoding state8, exact density evolution. From throw-away programs, to 0.003 of the
// efficiency f up to N = 2^16 and 0.006 beyond; the entries for FER 0.01 are those for 0.1 times
// 1.08, which is what N = 2^16, p = 0.05 shows, and those of N = 2^10 at p = 0.02 and 0.11, and of
// N = 2^12 at 0.11, follow from their neighbours.
#pragma once

#include <array>

namespace frostline::saving_table {

constexpr std::array<double, 2> kFers = {0.1, 0.01};
constexpr std::array<unsigned, 4> kLog2Lengths = {10, 12, 16, 20};
constexpr std::array<double, 3> kQbers = {0.02, 0.05, 0.11};
constexpr unsigned kLog2Lists = 5;  // L = 2, 4, 8, 16, 32

// [FER][N][p][log2 L - 1]
constexpr double kSaving[2][4][3][kLog2Lists] = {{{{0.1466, 0.2185, 0.2683, 0.3008, 0.3220},
                                                   {0.0929, 0.1453, 0.1832, 0.2042, 0.2232},
                                                   {0.0581, 0.0868, 0.1119, 0.1294, 0.1380}},
                                                  {{0.1172, 0.1781, 0.2134, 0.2385, 0.2558},
                                                   {0.0743, 0.1184, 0.1458, 0.1619, 0.1773},
                                                   {0.0464, 0.0708, 0.0890, 0.1026, 0.1096}},
                                                  {{0.0649, 0.1091, 0.1362, 0.1541, 0.1662},
                                                   {0.0483, 0.0736, 0.0918, 0.1021, 0.1116},
                                                   {0.0302, 0.0440, 0.0560, 0.0647, 0.0690}},
                                                  {{0.0382, 0.0626, 0.0788, 0.0853, 0.0926},
                                                   {0.0302, 0.0423, 0.0527, 0.0579, 0.0639},
                                                   {0.0127, 0.0245, 0.0300, 0.0363, 0.0418}}},
                                                 {{{0.1583, 0.2360, 0.2897, 0.3249, 0.3478},
                                                   {0.1004, 0.1569, 0.1979, 0.2205, 0.2410},
                                                   {0.0628, 0.0938, 0.1208, 0.1397, 0.1490}},
                                                  {{0.1265, 0.1924, 0.2305, 0.2576, 0.2763},
                                                   {0.0802, 0.1279, 0.1574, 0.1748, 0.1915},
                                                   {0.0502, 0.0764, 0.0961, 0.1108, 0.1184}},
                                                  {{0.0701, 0.1179, 0.1471, 0.1664, 0.1795},
                                                   {0.0521, 0.0795, 0.0991, 0.1102, 0.1205},
                                                   {0.0326, 0.0475, 0.0605, 0.0698, 0.0745}},
                                                  {{0.0412, 0.0676, 0.0851, 0.0921, 0.1000},
                                                   {0.0326, 0.0457, 0.0569, 0.0625, 0.0690},
                                                   {0.0137, 0.0265, 0.0324, 0.0392, 0.0451}}}};

// The part of the saving that is left without precoding (N = 2^12 and 2^16, p = 0.05, L = 8).
constexpr double kShareWithoutPrecoding = 0.91;

}  // namespace frostline::saving_table
