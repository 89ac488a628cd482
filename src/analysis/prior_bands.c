/* SPDX-License-Identifier: GPL-3.0-or-later */
/* prior_bands.c: the 5%, 50% and 95% points of what priors imply at each level. */
#include "analysis/prior_bands.h"

#include <math.h>

#include "base/mem.h"
#include "posterior/diagnostics.h"

static struct band band_of(const double *x, size_t n)
{
    static const double q[3] = {0.05, 0.5, 0.95};
    double out[3];
    diag_quantiles(x, n, 3, q, out);
    return (struct band){out[0], out[1], out[2]};
}

/* gain = s (m_k - m_reference); false where the design has no reference. */
static bool gain_row(const struct design *d, const struct draws *draws, size_t level, double *gain)
{
    if (!design_has_gain(d)) {
        return false;
    }
    double s = design_sign(d);
    const double *row = draws->response + level * draws->stride;
    const double *reference = d->reference_level >= 0
                                  ? draws->response + (size_t)d->reference_level * draws->stride
                                  : NULL;
    for (size_t i = 0; i < draws->n; i++) {
        gain[i] = s * (row[i] - (reference ? reference[i] : d->reference_number));
    }
    return true;
}

void prior_bands_init(struct prior_bands *out, const struct design *d, const struct draws *draws)
{
    out->levels = d->levels;
    out->response = mem_new(d->levels, sizeof *out->response);
    out->gain = mem_new(d->levels, sizeof *out->gain);
    double *gain = mem_new(draws->n, sizeof *gain);
    for (size_t k = 0; k < d->levels; k++) {
        out->response[k] = band_of(draws->response + k * draws->stride, draws->n);
        out->gain[k] =
            gain_row(d, draws, k, gain) ? band_of(gain, draws->n) : (struct band){NAN, NAN, NAN};
    }
    mem_free(gain);
}

void prior_bands_release(struct prior_bands *b)
{
    mem_free(b->response);
    mem_free(b->gain);
    *b = (struct prior_bands){0, NULL, NULL};
}
