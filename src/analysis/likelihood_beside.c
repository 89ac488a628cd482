/* SPDX-License-Identifier: GPL-3.0-or-later */
/* likelihood_beside.c: the likelihood fit beside the posterior of the same model and data. */
#include "analysis/likelihood_beside.h"

void likelihood_beside(struct analysis *out, const struct design *d, const struct level_data *data)
{
    likelihood_fit_release(&out->likelihood);
    likelihood_fit_run(&out->likelihood, d, &d->model, data);
    for (size_t i = 0; i < out->curve.points; i++) {
        double y;
        if (likelihood_fit_at(&out->likelihood, d, &d->model, out->curve.value[i], &y))
            out->curve.likelihood[i] = y;
    }
}
