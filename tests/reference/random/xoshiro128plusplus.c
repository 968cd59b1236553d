/* xoshiro128++ 1.0 written down again from Blackman & Vigna, ACM TOMS 47 (2021) 36, to make check values: prints `count`
   words from a start of four words. Usage: xoshiro s0 s1 s2 s3 count */
#include <stdint.h>
#include <stdio.h>
#include <stdlib.h>

static uint32_t rotate(uint32_t x, int by) { return (x << by) | (x >> (32 - by)); }

int main(int argc, char **argv) {
  uint32_t s[4];
  if (argc != 6) return 2;
  for (int i = 0; i < 4; i++) s[i] = (uint32_t)strtoul(argv[i + 1], NULL, 10);
  for (int n = atoi(argv[5]); n > 0; n--) {
    printf("%u\n", rotate(s[0] + s[3], 7) + s[0]);
    uint32_t t = s[1] << 9;
    s[2] ^= s[0];
    s[3] ^= s[1];
    s[1] ^= s[2];
    s[0] ^= s[3];
    s[2] ^= t;
    s[3] = rotate(s[3], 11);
  }
  return 0;
}
