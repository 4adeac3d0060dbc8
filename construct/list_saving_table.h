// What a list saves, measured: 1 - M of list decoding / M of the union bound, both for the same
// FER.
//
// planes:3, precoding state8, frozen sets of exact density evolution. Rows without a remark were
// measured with the fast list decoder, by
//     bash tests/bench/list_efficiency BUILD 0.1 BLOCKS ...    (tests/bench/list_efficiency.txt)
// and a test compares them with that file. "earlier": throw-away programs that this project grew
// out of, to 0.006 of the efficiency f. "from its neighbours": the row for p = 0.02 times what p =
// 0.005 saves more at 2^16.
#pragma once

#include <array>

namespace frostline::saving_table {

constexpr std::array<unsigned, 6> kLog2Lengths = {8, 10, 12, 14, 16, 20};
constexpr std::array<double, 4> kQbers = {0.005, 0.02, 0.05, 0.11};
constexpr unsigned kLog2Lists = 5;  // L = 2, 4, 8, 16, 32

// [N][p][log2 L - 1], for FER 0.1.
// clang-format off
constexpr double kSaving[6][4][kLog2Lists] = {
    {
        {0.2674, 0.3593, 0.4146, 0.4554, 0.5056},  // 2^8, 0.005
        {0.2127, 0.2810, 0.3212, 0.3554, 0.3857},  // 2^8, 0.02
        {0.1329, 0.1901, 0.2315, 0.2573, 0.2769},  // 2^8, 0.05
        {0.0833, 0.1218, 0.1463, 0.1653, 0.1779},  // 2^8, 0.11
    },
    {
        {0.2621, 0.3421, 0.3958, 0.4253, 0.4486},  // 2^10, 0.005
        {0.1516, 0.2169, 0.2616, 0.2896, 0.3116},  // 2^10, 0.02
        {0.1049, 0.1555, 0.1858, 0.2075, 0.2247},  // 2^10, 0.05
        {0.0637, 0.0969, 0.1190, 0.1328, 0.1423},  // 2^10, 0.11
    },
    {
        {0.1952, 0.2679, 0.3169, 0.3465, 0.3729},  // 2^12, 0.005
        {0.1167, 0.1769, 0.2132, 0.2381, 0.2558},  // 2^12, 0.02
        {0.0794, 0.1208, 0.1464, 0.1646, 0.1780},  // 2^12, 0.05
        {0.0472, 0.0737, 0.0901, 0.1019, 0.1099},  // 2^12, 0.11
    },
    {
        {0.1474, 0.2152, 0.2532, 0.2831, 0.3004},  // 2^14, 0.005
        {0.0904, 0.1378, 0.1696, 0.1911, 0.2064},  // 2^14, 0.02
        {0.0618, 0.0950, 0.1163, 0.1316, 0.1421},  // 2^14, 0.05
        {0.0383, 0.0591, 0.0720, 0.0811, 0.0885},  // 2^14, 0.11
    },
    {
        {0.1128, 0.1681, 0.2059, 0.2301, 0.2482},  // 2^16, 0.005
        {0.0695, 0.1085, 0.1325, 0.1492, 0.1615},  // 2^16, 0.02
        {0.0482, 0.0754, 0.0924, 0.1038, 0.1124},  // 2^16, 0.05
        {0.0287, 0.0450, 0.0561, 0.0638, 0.0691},  // 2^16, 0.11
    },
    {
        {0.0709, 0.1011, 0.1234, 0.1395, 0.1520},  // 2^20, 0.005 from its neighbours
        {0.0437, 0.0652, 0.0794, 0.0904, 0.0989},  // 2^20, 0.02
        {0.0269, 0.0422, 0.0525, 0.0607, 0.0662},  // 2^20, 0.05
        {0.0127, 0.0245, 0.0300, 0.0363, 0.0418},  // 2^20, 0.11 earlier
    },
};
// clang-format on

// By what factor the saving for FER 0.01 differs from that for 0.1, at each N: the geometric mean
// over the lists and QBERs that tests/bench/list_efficiency.txt has for FER 0.01; beyond 2^16 taken
// as 2^16.
constexpr std::array<double, 6> kGrowth = {0.91, 0.98, 1.05, 1.07, 1.05, 1.05};

// The part of the saving that is left without precoding: what the FERs with and without it in
// tests/bench/list_against_reference.txt come to.
constexpr double kShareWithoutPrecoding = 0.93;

}  // namespace frostline::saving_table
