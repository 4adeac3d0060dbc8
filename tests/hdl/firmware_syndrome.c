/* What firmware does at the sender, from the exported header alone: key bits in, syndrome out.
 * Reads N characters 0 or 1 from stdin, writes M. One block in place, one bit a byte. */
#include <stdio.h>

#include "frostline.h"

static uint8_t u[FROSTLINE_BLOCK_LENGTH];

/* The element of u that index i is. */
static unsigned long element(unsigned long i) {
  unsigned long reversed = 0;
  int bit;
  if (!FROSTLINE_BIT_REVERSED) return i;
  for (bit = 0; bit < FROSTLINE_LOG2_BLOCK_LENGTH; ++bit) {
    reversed = reversed << 1 | (i >> bit & 1);
  }
  return reversed;
}

static void transform(void) {
  unsigned long distance, first, j;
  for (distance = 1; distance < FROSTLINE_BLOCK_LENGTH; distance *= 2) {
    for (first = 0; first < FROSTLINE_BLOCK_LENGTH; first += 2 * distance) {
      for (j = first; j < first + distance; ++j) u[j] ^= u[j + distance];
    }
  }
}

#if FROSTLINE_STATE8
static int parity(unsigned value) {
  value ^= value >> 4;
  value ^= value >> 2;
  return (int)((value ^ value >> 1) & 1);
}

/* Turns u into public values at frozen indices. */
static void precode(void) {
  unsigned state = 0;
  unsigned long j, e;
  unsigned k;
  for (j = 0; j < FROSTLINE_BLOCK_LENGTH / 8; ++j) {
    const int adds = frostline_state8_adds[j / 8] >> (7 - j % 8) & 1;
    const int moves = frostline_state8_moves[j / 8] >> (7 - j % 8) & 1;
    unsigned open_bits = 0;
    for (k = 0; k < 8; ++k) {
      e = element(8 * j + k);
      if (!(frostline_frozen_mask[e / 8] >> (7 - e % 8) & 1)) {
        open_bits |= (unsigned)u[e] << k;
      } else if (adds) {
        u[e] ^= (uint8_t)parity(state & frostline_state8_rows[k]);
      }
    }
    if (moves) state = (state << 1 ^ (state & 0x80 ? 0x11d : 0) ^ open_bits) & 0xff;
  }
}
#endif

int main(void) {
  unsigned long i, t;
  for (i = 0; i < FROSTLINE_BLOCK_LENGTH; ++i) {
    const int c = getchar();
    if (c != '0' && c != '1') return 1;
    u[element(i)] = (uint8_t)(c - '0');
  }
  transform();
#if FROSTLINE_STATE8
  precode();
#endif
  for (t = 0; t < FROSTLINE_FROZEN_COUNT; ++t) putchar('0' + u[frostline_frozen_index[t]]);
  putchar('\n');
  return 0;
}
