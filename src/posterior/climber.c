/* SPDX-License-Identifier: GPL-3.0-or-later */
/* climber.c: one local search by NLopt, deterministic and without derivatives. */
#include "posterior/climber.h"

#include <math.h>

#include "base/mem.h"

/* NLopt goes on with other steps, or not at all, where it gets no memory: a different result. */
static void need_memory(nlopt_result result)
{
    if (result == NLOPT_OUT_OF_MEMORY)
        mem_exhausted();
}

double climber_run(const struct climber *c, double *x)
{
    double value = -INFINITY;
    nlopt_opt opt = nlopt_create(c->algorithm, c->dims);
    if (!opt)
        mem_exhausted();
    need_memory(nlopt_set_max_objective(opt, c->function, c->data));
    need_memory(nlopt_set_lower_bounds(opt, c->low));
    need_memory(nlopt_set_upper_bounds(opt, c->high));
    need_memory(nlopt_set_initial_step(opt, c->step));
    need_memory(nlopt_set_ftol_rel(opt, c->value_tolerance));
    need_memory(nlopt_set_xtol_rel(opt, c->place_tolerance));
    need_memory(nlopt_set_maxeval(opt, c->most));
    need_memory(nlopt_optimize(opt, x, &value));
    nlopt_destroy(opt);
    return value;
}
