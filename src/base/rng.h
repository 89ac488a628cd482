/* SPDX-License-Identifier: GPL-3.0-or-later */
/* rng.h: counter-based random streams (Philox4x32-10) and the lane generator expanded from them.
 *
 * Salmon, Moraes, Dror & Shaw (2011), Parallel random numbers: as easy as 1, 2, 3, SC'11.
 * A stream is named by what it is for, never by who computes it, so that results do not depend on
 * threads, processes, compiler or order.
 */
#ifndef TERRACE_RNG_H
#define TERRACE_RNG_H

#include <stddef.h>
#include <stdint.h>

enum rng_purpose {
    RNG_ARRIVAL = 1,
    RNG_ALLOCATION = 2,
    RNG_OUTCOME = 3,
    RNG_DROPOUT = 4,
    RNG_SAMPLER = 5,
    RNG_SLICE = 6,
    RNG_QUADRATURE = 7,
    RNG_PRIOR = 8,
    RNG_REPEATED = 9 /* data repeated under the fitted model */
};

/* Counter layout: purpose 8, scenario 16, trial 32, index 32, block 40 bits. */
struct rng_key {
    uint64_t seed;
    enum rng_purpose purpose;
    uint16_t scenario; /* position in the file from 1; 0: live analysis and fit */
    uint32_t trial;    /* from 1; 0: live */
    uint32_t index;    /* subject number, or analysis number for the sampler */
};

/* One block: 4 x 32 random bits. Known answers in rng.c and its test. */
void philox4x32(uint32_t out[4], const uint32_t counter[4], const uint32_t key[2]);

/* The block-th block of a stream (block < 2^40). */
void rng_block(uint32_t out[4], const struct rng_key *key, uint64_t block);

/* Uniform on (0, 1), 52 bits: (bits + 1/2) / 2^52, of the first two words of block `block`. */
double rng_uniform(const struct rng_key *key, uint64_t block);

/* A serial generator for the rare scalar draws: xoshiro256++ (Blackman & Vigna 2021, ACM TOMS
 * 47:36), its state taken from two blocks of the stream. */
struct rng_serial {
    uint64_t s[4];
};
void rng_serial_init(struct rng_serial *r, const struct rng_key *key);
uint64_t rng_serial_bits(struct rng_serial *r);
double rng_serial_uniform(struct rng_serial *r); /* (0, 1) */
double rng_serial_normal(struct rng_serial *r);  /* by the normal quantile of a uniform */

/* Eight generators side by side, one a chain; state [word][lane]. Filled and advanced by the
 * kernels (posterior/kernel.c). Lane l takes blocks 2l and 2l + 1 of the stream. */
enum { RNG_LANES = 8 };
struct rng_lanes {
    uint64_t s[4][RNG_LANES];
};
void rng_lanes_init(struct rng_lanes *r, const struct rng_key *key);

#endif
