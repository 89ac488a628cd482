/* SPDX-License-Identifier: GPL-3.0-or-later */
/* climber.h: one local search by NLopt, deterministic and without derivatives. */
#ifndef TERRACE_CLIMBER_H
#define TERRACE_CLIMBER_H

#include <nlopt.h>

/* What is climbed, within a box; step is the first one. Ends at the relative tolerances or after
 * `most` values. */
struct climber {
    nlopt_algorithm algorithm;
    unsigned dims;
    nlopt_func function;
    void *data; /* the function's */
    const double *low, *high, *step;
    double value_tolerance, place_tolerance; /* 0: none */
    int most;
};

/* Climbs from x[dims], leaves the best place there and returns its value (-INFINITY when there was
 * none). Lack of memory inside NLopt ends the program as everywhere (mem.h). */
double climber_run(const struct climber *c, double *x);

#endif
