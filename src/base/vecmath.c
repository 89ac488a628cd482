/* SPDX-License-Identifier: GPL-3.0-or-later */
/* vecmath.c: block functions over arrays, compiled once per instruction set. */
#include "base/vecmath.h"

#include "base/isa_name.h"
#include "base/vecmath_lanes.h"

/* A short tail goes through a padded copy, so that every element takes the same path. */
#define BLOCK(function, lanes)                                    \
    static void function(size_t n, const double *in, double *out) \
    {                                                             \
        size_t i = 0;                                             \
        for (; i + VL <= n; i += VL)                              \
            v_store(out + i, lanes(v_load(in + i)));              \
        if (i < n) {                                              \
            double rest[VL] = {0};                                \
            memcpy(rest, in + i, (n - i) * sizeof *rest);         \
            v_store(rest, lanes(v_load(rest)));                   \
            memcpy(out + i, rest, (n - i) * sizeof *rest);        \
        }                                                         \
    }

BLOCK(block_exp, v_exp)
BLOCK(block_log, v_log)
BLOCK(block_log1p_exp, v_log1p_exp)
BLOCK(block_logistic, v_logistic)
BLOCK(block_normal_cdf, v_normal_cdf)

const struct vecmath ISA_NAME(vecmath) = {
    ISA_TEXT, block_exp, block_log, block_log1p_exp, block_logistic, block_normal_cdf,
};
