/* SPDX-License-Identifier: GPL-3.0-or-later */
/* rng.c: Philox4x32-10 and the generators expanded from it. */
#include "base/rng.h"

#include "base/vecmath.h"

/* Salmon et al. 2011, section 3.3: ten rounds of two 32 x 32 -> 64 multiplications, the key bumped
 * by a Weyl sequence. Published known answers (from memory): counter 0, key 0 -> 6627e8d5 e169c58d
 * bc57ac4c 9b00dbd8. */
void philox4x32(uint32_t out[4], const uint32_t counter[4], const uint32_t key[2])
{
    uint32_t x0 = counter[0], x1 = counter[1], x2 = counter[2], x3 = counter[3];
    uint32_t k0 = key[0], k1 = key[1];
    for (int round = 0; round < 10; round++) {
        const uint64_t p0 = (uint64_t)0xD2511F53u * x0;
        const uint64_t p1 = (uint64_t)0xCD9E8D57u * x2;
        const uint32_t y0 = (uint32_t)(p1 >> 32) ^ x1 ^ k0;
        const uint32_t y2 = (uint32_t)(p0 >> 32) ^ x3 ^ k1;
        x1 = (uint32_t)p1;
        x3 = (uint32_t)p0;
        x0 = y0;
        x2 = y2;
        k0 += 0x9E3779B9u;
        k1 += 0xBB67AE85u;
    }
    out[0] = x0;
    out[1] = x1;
    out[2] = x2;
    out[3] = x3;
}

void rng_block(uint32_t out[4], const struct rng_key *key, uint64_t block)
{
    const uint64_t low = (block & 0xffffffffffULL) | (uint64_t)(key->index & 0xffffffu) << 40;
    const uint64_t high = (uint64_t)(key->index >> 24) | (uint64_t)key->trial << 8 |
                          (uint64_t)key->scenario << 40 | (uint64_t)key->purpose << 56;
    const uint32_t counter[4] = {(uint32_t)low, (uint32_t)(low >> 32), (uint32_t)high,
                                 (uint32_t)(high >> 32)};
    const uint32_t seed[2] = {(uint32_t)key->seed, (uint32_t)(key->seed >> 32)};
    philox4x32(out, counter, seed);
}

static uint64_t join(uint32_t low, uint32_t high)
{
    return (uint64_t)high << 32 | low;
}

static double open_uniform(uint64_t bits)
{
    return ((double)(bits >> 12) + 0.5) * 0x1p-52;
}

double rng_uniform(const struct rng_key *key, uint64_t block)
{
    uint32_t b[4];
    rng_block(b, key, block);
    return open_uniform(join(b[0], b[1]));
}

static void fill_state(uint64_t s[4], const struct rng_key *key, uint64_t first)
{
    uint32_t b[8];
    rng_block(b, key, first);
    rng_block(b + 4, key, first + 1);
    for (int i = 0; i < 4; i++)
        s[i] = join(b[2 * i], b[2 * i + 1]);
    if (!(s[0] | s[1] | s[2] | s[3]))
        s[0] = 1; /* the one state that xoshiro cannot leave */
}

void rng_serial_init(struct rng_serial *r, const struct rng_key *key)
{
    fill_state(r->s, key, 0);
}

static uint64_t rotate(uint64_t x, int by)
{
    return x << by | x >> (64 - by);
}

uint64_t rng_serial_bits(struct rng_serial *r)
{
    uint64_t *s = r->s;
    const uint64_t result = rotate(s[0] + s[3], 23) + s[0];
    const uint64_t t = s[1] << 17;
    s[2] ^= s[0];
    s[3] ^= s[1];
    s[1] ^= s[2];
    s[0] ^= s[3];
    s[2] ^= t;
    s[3] = rotate(s[3], 45);
    return result;
}

double rng_serial_uniform(struct rng_serial *r)
{
    return open_uniform(rng_serial_bits(r));
}

double rng_serial_normal(struct rng_serial *r)
{
    return vm_normal_quantile(rng_serial_uniform(r));
}

void rng_lanes_init(struct rng_lanes *r, const struct rng_key *key)
{
    for (uint64_t lane = 0; lane < RNG_LANES; lane++) {
        uint64_t s[4];
        fill_state(s, key, 2 * lane);
        for (int word = 0; word < 4; word++)
            r->s[word][lane] = s[word];
    }
}
