// What a list saves, measured: 1 - M of list decoding / M of the union bound, both for the same
// FER.
//
// planes:3, precoding state8, frozen sets of exact density evolution. Rows without a remark are
// from
//     tests/bench/list_efficiency BUILD 0.1 BLOCKS ...     (tests/bench/list_efficiency.txt)
// and a test compares them with that file. "earlier": throw-away programs that this project grew
// out of, to 0.003 of the efficiency f at 2^16 and 0.006 at 2^20. "from its neighbours": the row
// for p = 0.02 times what p = 0.005 saves more at 2^12.
#pragma once

#include <array>

namespace frostline::saving_table {

constexpr std::array<unsigned, 5> kLog2Lengths = {8, 10, 12, 16, 20};
constexpr std::array<double, 4> kQbers = {0.005, 0.02, 0.05, 0.11};
constexpr unsigned kLog2Lists = 5;  // L = 2, 4, 8, 16, 32

// [N][p][log2 L - 1], for FER 0.1.
// clang-format off
constexpr double kSaving[5][4][kLog2Lists] = {
    {
        {0.2940, 0.3654, 0.4065, 0.4541, 0.4929},  // 2^8, 0.005
        {0.2087, 0.2788, 0.3236, 0.3581, 0.3865},  // 2^8, 0.02
        {0.1286, 0.1834, 0.2254, 0.2534, 0.2757},  // 2^8, 0.05
        {0.0759, 0.1194, 0.1444, 0.1632, 0.1756},  // 2^8, 0.11
    },
    {
        {0.2623, 0.3458, 0.3922, 0.4240, 0.4491},  // 2^10, 0.005
        {0.1544, 0.2195, 0.2559, 0.2859, 0.3101},  // 2^10, 0.02
        {0.1056, 0.1558, 0.1873, 0.2088, 0.2257},  // 2^10, 0.05
        {0.0622, 0.0958, 0.1154, 0.1306, 0.1411},  // 2^10, 0.11
    },
    {
        {0.1890, 0.2676, 0.3178, 0.3493, 0.3746},  // 2^12, 0.005
        {0.1191, 0.1793, 0.2162, 0.2377, 0.2569},  // 2^12, 0.02
        {0.0781, 0.1190, 0.1437, 0.1617, 0.1771},  // 2^12, 0.05
        {0.0472, 0.0737, 0.0902, 0.1008, 0.1096},  // 2^12, 0.11
    },
    {
        {0.1030, 0.1629, 0.2003, 0.2264, 0.2423},  // 2^16, 0.005 from its neighbours
        {0.0649, 0.1091, 0.1362, 0.1541, 0.1662},  // 2^16, 0.02 earlier
        {0.0483, 0.0736, 0.0918, 0.1021, 0.1116},  // 2^16, 0.05 earlier
        {0.0302, 0.0440, 0.0560, 0.0647, 0.0690},  // 2^16, 0.11 earlier
    },
    {
        {0.0606, 0.0934, 0.1158, 0.1253, 0.1350},  // 2^20, 0.005 from its neighbours
        {0.0382, 0.0626, 0.0788, 0.0853, 0.0926},  // 2^20, 0.02 earlier
        {0.0302, 0.0423, 0.0527, 0.0579, 0.0639},  // 2^20, 0.05 earlier
        {0.0127, 0.0245, 0.0300, 0.0363, 0.0418},  // 2^20, 0.11 earlier
    },
};
// clang-format on

// By what factor the saving for FER 0.01 differs from that for 0.1, at each N: the mean over the
// lists in tests/bench/list_efficiency.txt up to 2^12; 2^16 earlier; 2^20 taken as 2^16.
constexpr std::array<double, 5> kGrowth = {0.95, 0.98, 1.02, 1.07, 1.07};

// The part of the saving that is left without precoding: what the FERs with and without it in
// tests/bench/list_against_reference.txt come to.
constexpr double kShareWithoutPrecoding = 0.93;

}  // namespace frostline::saving_table
