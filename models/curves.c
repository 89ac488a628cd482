/* SPDX-License-Identifier: GPL-3.0-or-later */
/* curves.c: the list of curves as the program walks it, and what several of them share. */
#include "models/curves.h"

#include "base/vecmath.h"

#define CURVE_ADDRESS(NAME) &curve_##NAME,
const struct curve *const curves[] = {CURVE_LIST(CURVE_ADDRESS) NULL};

double lowest_level(const struct curve_levels *levels)
{
    return levels->value[0];
}

double largest_level(const struct curve_levels *levels)
{
    return levels->value[levels->count - 1];
}

const char *saturating_level_fault(const struct curve_levels *levels)
{
    if (lowest_level(levels) < 0.0)
        return "a value is below 0; all must be 0 or more, and one above 0";
    if (largest_level(levels) <= 0.0)
        return "no value is above 0; all must be 0 or more, and one above 0";
    return NULL;
}

struct prior saturating_ED50(const struct curve_levels *levels)
{
    size_t k = 0;

    while (k + 1 < levels->count && levels->value[k] <= 0.0)
        k++;
    return prior_lognormal(0.5 * (vm_log(levels->value[k]) + vm_log(largest_level(levels))), 1);
}

void fill_row(size_t n, double value, double *row)
{
    for (size_t i = 0; i < n; i++)
        row[i] = value;
}
