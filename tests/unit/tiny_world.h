/* SPDX-License-Identifier: GPL-3.0-or-later */
/* tiny_world.h: small designs and draws made by hand, for tests of targets, measures and shares. */
#ifndef TERRACE_TEST_TINY_WORLD_H
#define TERRACE_TEST_TINY_WORLD_H

#include <stdint.h>

#include "design/design.h"
#include "posterior/posterior.h"

enum { TINY_LEVELS = 8, TINY_TARGETS = 8 };

/* Valid from tiny_init on; `d` points into the struct, which must not move. */
struct tiny_world {
    struct design d;
    struct level level[TINY_LEVELS];
    struct target target[TINY_TARGETS];
    double ratio[TINY_LEVELS], at_least[TINY_LEVELS], at_most[TINY_LEVELS];
};

/* Levels A, B, C, ... at 1, 2, 3, ...; gains against the control (index or LEVEL_NONE) if there is
 * one, else none; continuous, higher is better; equal ratio; adapts by target 0; no targets yet. */
void tiny_init(struct tiny_world *w, size_t levels, int control);

/* Appends a target: `number` is its fraction, effect or margin. */
struct target *tiny_target(struct tiny_world *w, const struct target_rule *rule, double number,
                           int of);

/* n draws of the world's levels: value(i, level) on both scales. The array is owned by the caller
 * and freed by mem_free. */
double *tiny_draws(struct draws *out, const struct tiny_world *w, size_t n,
                   double (*value)(size_t i, size_t level));

/* A small generator of the tests' own: whole numbers below `below`. */
uint64_t tiny_random(uint64_t *state, uint64_t below);

#endif
