/* SPDX-License-Identifier: GPL-3.0-or-later */
/* raw_interval.c: mean, sd and a classical 95% interval of the raw outcomes of one level. */
#include "analysis/raw_interval.h"

#include <math.h>

/* The standard normal's 0.975 quantile. */
static const double Z = 1.959963984540054;

/* mean +- z sd / sqrt(n); with one outcome there is no sd and no interval. */
static void mean_interval(struct raw_figures *r, double ss)
{
    if (r->n < 2)
        return;
    r->sd = sqrt(ss / (r->n - 1));
    r->low = r->mean - Z * r->sd / sqrt(r->n);
    r->high = r->mean + Z * r->sd / sqrt(r->n);
}

/* Score interval of a proportion p from n subjects (Wilson 1927, Journal of the American
 * Statistical Association 22:209):
 *
 *     (p + z^2/2n +- z sqrt(p(1 - p)/n + z^2/4n^2)) / (1 + z^2/n)
 *
 * Stays in [0, 1] and does not collapse at no events or only events. Check: 8 of 10 gives 0.4902 to
 * 0.9433. */
static void rate_interval(struct raw_figures *r)
{
    const double z2 = Z * Z / r->n;
    const double middle = (r->mean + z2 / 2) / (1 + z2);
    const double half = Z * sqrt(r->mean * (1 - r->mean) / r->n + z2 / (4 * r->n)) / (1 + z2);
    r->low = middle - half > 0 ? middle - half : 0;
    r->high = middle + half < 1 ? middle + half : 1;
}

struct raw_figures raw_interval(const struct level_data *data, enum endpoint_type type,
                                size_t level)
{
    struct raw_figures r = {data->n[level], NAN, NAN, NAN, NAN};
    if (!(r.n > 0))
        return r;
    if (type == ENDPOINT_BINARY) {
        r.mean = data->events[level] / r.n;
        rate_interval(&r);
    } else {
        r.mean = data->mean[level];
        mean_interval(&r, data->ss[level]);
    }
    return r;
}
