/* SPDX-License-Identifier: GPL-3.0-or-later */
/* predictive.c: the measure predictive_next: how likely the selected level wins its next trial.
 *
 * A next two-arm trial against the reference, m subjects an arm, tested one-sided at alpha. Given a
 * draw with gain g (response scale, larger is better) its power is
 *
 *     Phi(g / se - z_{1 - alpha}),  se = sd sqrt(2 / m)                              continuous
 *                                   se = sqrt((p1 (1 - p1) + p0 (1 - p0)) / m)       binary
 *
 * and the measure is the average over draws. g / se is 0 where g = 0. Check value: g = 1, sd = 2,
 * m = 50, alpha = 0.025: Phi(2.5 - 1.959964) = 0.705418.
 */
#include <math.h>

#include "analysis/measures.h"
#include "analysis/row_words.h"
#include "base/base.h"
#include "base/vecmath.h"
#include "posterior/diagnostics.h"

static const double *residual_row(const struct judgement *j)
{
    const struct model *m = &j->d->model;
    for (size_t i = 0; i < m->parameters; i++)
        if (m->parameter[i]->role == ROLE_RESIDUAL)
            return j->draws.parameter + i * j->draws.stride;
    BUG("a continuous endpoint without a residual sd");
}

static double ratio(double gain, double se)
{
    if (gain == 0)
        return 0;
    return gain / se;
}

/* g / se on every draw; se = 0 with a gain gives an infinite ratio. */
static void continuous_ratios(const struct judgement *j, const double *m, const double *m0,
                              double per_arm, double *x)
{
    const double s = design_sign(j->d), root = sqrt(2 / per_arm);
    const double *sd = residual_row(j);
    for (size_t i = 0; i < j->draws.n; i++)
        x[i] = ratio(s * (m[i] - m0[i]), sd[i] * root);
}

static void binary_ratios(const struct judgement *j, const double *p1, const double *p0,
                          double per_arm, double *x)
{
    const double s = design_sign(j->d);
    for (size_t i = 0; i < j->draws.n; i++) {
        const double variance = p1[i] * (1 - p1[i]) + p0[i] * (1 - p0[i]);
        x[i] = ratio(s * (p1[i] - p0[i]), sqrt(variance / per_arm));
    }
}

static void predictive_evaluate(const struct condition *c, const struct judgement *j, double *value,
                                double *mcse)
{
    *value = *mcse = 0;
    if (*j->level < 0)
        return;
    const double *m = judge_row(j, (size_t)*j->level, false);
    const double *m0 = judge_row(j, (size_t)j->d->reference_level, false);
    const double z = -vm_normal_quantile(c->alpha);
    double *x = j->work;
    if (j->d->type == ENDPOINT_BINARY)
        binary_ratios(j, m, m0, c->per_arm, x);
    else
        continuous_ratios(j, m, m0, c->per_arm, x);
    for (size_t i = 0; i < j->draws.n; i++)
        x[i] -= z;
    vecmath()->normal_cdf(j->draws.n, x, x);
    *value = diag_mean(x, j->draws.n);
    *mcse = judge_mcse_mean(j, x, j->draws.n, *value);
}

static void predictive_sentence(const struct condition *c, const struct design *d, struct text *out)
{
    text_add(out, "the predictive probability that ");
    add_selected(out, d, c->target);
    text_add(out, " wins a next trial");
    if (d->reference_level >= 0)
        text_addf(out, " against %s", d->level[d->reference_level].label);
    text_add(out, ", ");
    add_shortest_number(out, c->per_arm);
    text_add(out, " subjects an arm, one-sided alpha ");
    add_shortest_number(out, c->alpha);
}

const struct measure measure_predictive_next = {.key = "predictive_next",
                                                .allowed = ARG_TARGET | ARG_PER_ARM | ARG_ALPHA,
                                                .required = ARG_TARGET | ARG_PER_ARM | ARG_ALPHA,
                                                .needs_gain = true,
                                                .needs_reference_level = true,
                                                .sentence = predictive_sentence,
                                                .evaluate = predictive_evaluate};
