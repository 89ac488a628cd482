/* SPDX-License-Identifier: GPL-3.0-or-later */
/* test_rng.c: Philox against its published vectors, streams that are told apart, and the lanes. */
#include <math.h>
#include <string.h>

#include "base/rng.h"
#include "posterior/sampler.h"
#include "unit.h"

/* Salmon, Moraes, Dror & Shaw 2011, known-answer vectors (from memory) */
static void known_answers(void)
{
    static const uint32_t vectors[3][10] = {
        {0, 0, 0, 0, 0, 0, 0x6627e8d5, 0xe169c58d, 0xbc57ac4c, 0x9b00dbd8},
        {0xffffffff, 0xffffffff, 0xffffffff, 0xffffffff, 0xffffffff, 0xffffffff, 0x408f276d,
         0x41c83b0e, 0xa20bc7c6, 0x6d5451fd},
        {0x243f6a88, 0x85a308d3, 0x13198a2e, 0x03707344, 0xa4093822, 0x299f31d0, 0xd16cfe09,
         0x94fdcceb, 0x5001e420, 0x24126ea1}};
    for (size_t i = 0; i < 3; i++) {
        uint32_t out[4];
        philox4x32(out, vectors[i], vectors[i] + 4);
        CU_ASSERT(memcmp(out, vectors[i] + 6, sizeof out) == 0);
    }
}

/* counter: purpose 8, scenario 16, trial 32, index 32, block 40 bits, most significant first */
static void counter_layout(void)
{
    const struct rng_key key = {.seed = 0x0123456789abcdefULL,
                                .purpose = RNG_OUTCOME,
                                .scenario = 0xbeef,
                                .trial = 0xcafef00d,
                                .index = 0x87654321};
    const uint64_t block = 0xabcdef0123ULL;
    const uint32_t counter[4] = {0xcdef0123, 0x654321ab, 0xfef00d87, 0x03beefca};
    const uint32_t seed[2] = {0x89abcdef, 0x01234567};
    uint32_t got[4], want[4];
    rng_block(got, &key, block);
    philox4x32(want, counter, seed);
    CU_ASSERT(memcmp(got, want, sizeof got) == 0);
}

static void streams_differ(void)
{
    struct rng_key keys[6];
    for (size_t i = 0; i < 6; i++)
        keys[i] = (struct rng_key){
            .seed = 1, .purpose = RNG_SAMPLER, .scenario = 1, .trial = 1, .index = 1};
    keys[1].seed = 2;
    keys[2].purpose = RNG_SLICE;
    keys[3].scenario = 2;
    keys[4].trial = 2;
    keys[5].index = 2;
    for (size_t i = 0; i < 6; i++)
        for (size_t j = 0; j < i; j++)
            CU_ASSERT(rng_uniform(&keys[i], 0) != rng_uniform(&keys[j], 0));
}

static void serial_moments(void)
{
    enum { N = 200000 };
    struct rng_serial r;
    double sum = 0, squares = 0, least = 1, most = 0;
    rng_serial_init(&r, &(struct rng_key){.seed = 3, .purpose = RNG_OUTCOME});
    for (int i = 0; i < N; i++) {
        const double u = rng_serial_uniform(&r), z = rng_serial_normal(&r);
        least = fmin(least, u);
        most = fmax(most, u);
        sum += z;
        squares += z * z;
    }
    CU_ASSERT(least > 0.0 && most < 1.0);
    CU_ASSERT_DOUBLE_EQUAL(sum / N, 0.0, 4.0 / sqrt(N));
    CU_ASSERT_DOUBLE_EQUAL(squares / N, 1.0, 4.0 * sqrt(2.0 / N));
}

/* Box-Muller lanes: moments to the fourth order and Pr(|z| < 1), each within 4.5 standard errors */
static void lane_normals(void)
{
    enum { N = 400000 };
    static double z[N];
    struct rng_lanes r;
    double m1 = 0, m2 = 0, m4 = 0, inside = 0, cross = 0;
    rng_lanes_init(&r, &(struct rng_key){.seed = 4, .purpose = RNG_SAMPLER});
    sampler_kernel_in_force()->normals(&r, N, z);
    for (size_t i = 0; i < N; i++) {
        m1 += z[i] / N;
        m2 += z[i] * z[i] / N;
        m4 += z[i] * z[i] * z[i] * z[i] / N;
        inside += fabs(z[i]) < 1.0 ? 1.0 / N : 0.0;
        cross += i % 16 < 8 ? z[i] * z[i + 8] * 2.0 / N : 0.0;
    }
    CU_ASSERT_DOUBLE_EQUAL(m1, 0.0, 4.5 / sqrt(N));
    CU_ASSERT_DOUBLE_EQUAL(m2, 1.0, 4.5 * sqrt(2.0 / N));
    CU_ASSERT_DOUBLE_EQUAL(m4, 3.0, 4.5 * sqrt(96.0 / N));
    CU_ASSERT_DOUBLE_EQUAL(inside, 0.682689492137086, 4.5 * sqrt(0.2166 / N)); /* A&S table 26.1 */
    CU_ASSERT_DOUBLE_EQUAL(cross, 0.0, 4.5 * sqrt(2.0 / N));
}

static void lanes_equal_serial(void)
{
    double lanes[64];
    struct rng_lanes r;
    const struct rng_key key = {.seed = 5, .purpose = RNG_SAMPLER};
    rng_lanes_init(&r, &key);
    struct rng_serial first;
    rng_serial_init(&first, &key); /* lane 0 is the serial generator of the stream */
    sampler_kernel_in_force()->uniforms(&r, 64, lanes);
    for (size_t i = 0; i < 8; i++)
        CU_ASSERT_EQUAL(lanes[8 * i], rng_serial_uniform(&first));
}

static const struct unit_test tests[] = {
    {"Philox, published vectors", known_answers},
    {"counter layout", counter_layout},
    {"streams differ", streams_differ},
    {"serial uniforms and normals", serial_moments},
    {"normals on lanes", lane_normals},
    {"lane 0 is the serial stream", lanes_equal_serial},
    UNIT_END,
};

int main(void)
{
    return unit_main("rng", tests);
}
