/* SPDX-License-Identifier: GPL-3.0-or-later */
/* lanes.h: one vector of doubles of the instruction set this file is compiled for.
 *
 * Included only by sources that the Makefile compiles once per instruction set (and by the scalar
 * functions). Every operation is an IEEE operation a lane, so a lane's bits never depend on the
 * width. Vectors never cross a function that is not inlined here.
 */
#ifndef TERRACE_LANES_H
#define TERRACE_LANES_H

#include <immintrin.h>
#include <stddef.h>
#include <stdint.h>
#include <string.h>

#if defined(__AVX2__)
enum { VL = 4 };
#define LANES_BYTES 32
#else
enum { VL = 2 };
#define LANES_BYTES 16
#endif

typedef double vd __attribute__((vector_size(LANES_BYTES)));
typedef uint64_t vu __attribute__((vector_size(LANES_BYTES)));
typedef int64_t vi __attribute__((vector_size(LANES_BYTES)));

#define LANE_FN static inline __attribute__((always_inline, unused))

LANE_FN vd v_load(const double *p)
{
    vd x;
    memcpy(&x, p, sizeof x);
    return x;
}

LANE_FN void v_store(double *p, vd x)
{
    memcpy(p, &x, sizeof x);
}

LANE_FN vu v_load_bits(const uint64_t *p)
{
    vu x;
    memcpy(&x, p, sizeof x);
    return x;
}

LANE_FN void v_store_bits(uint64_t *p, vu x)
{
    memcpy(p, &x, sizeof x);
}

LANE_FN vd v_set(double x)
{
    return x - (vd){0};
}

LANE_FN vu v_set_bits(uint64_t x)
{
    return x - (vu){0};
}

/* where ? a : b; `where` is a comparison of vectors (all bits or none). */
LANE_FN vd v_pick(vi where, vd a, vd b)
{
    return (vd)(((vi)a & where) | ((vi)b & ~where));
}

LANE_FN vd v_max(vd a, vd b)
{
    return v_pick(a > b, a, b);
}

LANE_FN vd v_min(vd a, vd b)
{
    return v_pick(a < b, a, b);
}

LANE_FN vd v_abs(vd x)
{
    return (vd)((vu)x & v_set_bits(0x7fffffffffffffffULL));
}

/* whether every lane of a comparison holds */
LANE_FN int v_all(vi where)
{
#if defined(__AVX2__)
    return _mm256_movemask_pd((__m256d)where) == 15;
#else
    return _mm_movemask_pd((__m128d)where) == 3;
#endif
}

LANE_FN vd v_sqrt(vd x)
{
#if defined(__AVX2__)
    return (vd)_mm256_sqrt_pd((__m256d)x);
#else
    return (vd)_mm_sqrt_pd((__m128d)x);
#endif
}

#endif
