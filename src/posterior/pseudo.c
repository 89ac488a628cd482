/* SPDX-License-Identifier: GPL-3.0-or-later */
/* pseudo.c: Gaussian pseudo-data that stand for a binomial likelihood in proposals. */
#include <string.h>

#include "base/vecmath.h"
#include "posterior/proposal.h"

enum { NEWTON_STEPS = 5 };

static void start_pseudo(const struct problem *p, size_t n, double *y, double *w)
{
    for (size_t k = 0; k < p->levels; k++) {
        const double size = p->n[k], events = p->events[k];
        const double rate = (events + 0.5) / (size + 1.0);
        for (size_t i = 0; i < n; i++) {
            y[k * n + i] = size > 0.0 ? vm_logit(rate) : 0.0;
            w[k * n + i] = size * rate * (1.0 - rate);
        }
    }
}

/* The proposal is wider where the likelihood has no peak. */
static void widen_pseudo(const struct problem *p, size_t n, double *w)
{
    for (size_t k = 0; k < p->levels; k++)
        if (p->n[k] > 0.0 && (p->events[k] == 0.0 || p->events[k] == p->n[k]))
            for (size_t i = 0; i < n; i++)
                w[k * n + i] *= 0.5;
}

static void pseudo_mean(const struct problem *p, struct points *pt, double *theta, double *normal,
                        double *beta)
{
    memset(normal, 0, problem_normal_rows(p) * pt->n * sizeof *normal);
    density_at(p, pt);
    pt->same_shapes = true;
    p->marginal->draw(p, pt->n, pt->x, pt->factor, normal, theta, beta);
}

void proposal_pseudo(const struct problem *p, struct points *pt, double *y, double *w,
                     double *theta, double *normal, double *beta)
{
    start_pseudo(p, pt->n, y, w);
    pt->y = y;
    pt->w = w;
    for (int step = 0; step < NEWTON_STEPS; step++) {
        pseudo_mean(p, pt, theta, normal, beta);
        p->marginal->pseudo(p, pt->n, theta, y, w);
    }
    widen_pseudo(p, pt->n, w);
    pseudo_mean(p, pt, theta, normal, beta);
}
