/* Prints what an exported C header says: N, M, the mask with element 0 first, the index list. */
#include <stdio.h>

#include "frostline.h"

int main(void) {
  unsigned long e;
  printf("%d %d %d\n", FROSTLINE_BLOCK_LENGTH, FROSTLINE_FROZEN_COUNT, FROSTLINE_BIT_REVERSED);
  for (e = 0; e < FROSTLINE_BLOCK_LENGTH; ++e) {
    putchar('0' + (frostline_frozen_mask[e / 8] >> (7 - e % 8) & 1));
  }
  putchar('\n');
  for (e = 0; e < FROSTLINE_FROZEN_COUNT; ++e) printf("%u ", (unsigned)frostline_frozen_index[e]);
  putchar('\n');
  return 0;
}
