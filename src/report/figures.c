/* SPDX-License-Identifier: GPL-3.0-or-later */
/* figures.c: the table of figures by level, and how many digits each kind of figure shows. */
#include "report/figures.h"

#include <math.h>
#include <string.h>

#include "analysis/raw_interval.h"
#include "base/base.h"
#include "base/number.h"

/* ---- digits ---- */

static double larger(double a, double b)
{
    return b > a ? b : a; /* a NaN in b is passed over */
}

/* Six decimals cannot show an error below half a millionth, and a fixed point is no help to numbers
 * of ten million and more. */
struct digits digits_for(double error, double largest, int fallback)
{
    const struct digits fixed = {number_decimals_for(error, fallback), 0};
    const struct digits floating = {0, 5};
    const bool tiny = (error > 0 && error < 5e-7) || (largest > 0 && largest < 1e-3);
    return tiny || largest >= 1e7 ? floating : fixed;
}

/* One number of decimals for all responses and gains, so that columns line up: that of the least
 * certain level. */
struct digits digits_response(const struct analysis_report *r)
{
    const double ess = r->a->diagnostics.min_ess_bulk;
    double sd = 0, largest = 0;
    for (size_t k = 0; k < r->a->levels; k++) {
        const struct spread *s = &r->a->level[k].response;
        sd = larger(sd, s->sd);
        largest = larger(largest, larger(fabs(s->q025), fabs(s->q975)));
    }
    return digits_for(ess > 0 ? sd / sqrt(ess) : NAN, largest, 3);
}

struct digits digits_target(const struct analysis_report *r)
{
    double error = 0;
    for (size_t k = 0; k < r->a->levels; k++)
        for (size_t t = 0; t < r->a->targets; t++) {
            error = larger(error, r->a->level[k].mcse_target[t]);
            error = larger(error, r->a->level[k].mcse_meets[t]);
        }
    const int decimals = number_decimals_for(error, 3);
    return (struct digits){decimals < 2 ? 2 : decimals > 4 ? 4 : decimals, 0};
}

void figure_number(struct text *out, double x, struct digits g)
{
    char s[NUMBER_CHARS];
    text_add(out, g.significant > 0 && !isnan(x) ? number_significant(s, x, g.significant)
                                                 : number_fixed(s, x, g.decimals));
}

void figure_interval(struct text *out, double low, double high, struct digits g)
{
    figure_number(out, low, g);
    if (isnan(low))
        return;
    text_add(out, " to ");
    figure_number(out, high, g);
}

void figure_probability(struct text *out, double p, struct digits g)
{
    double half = 0.5;
    for (int i = 0; i < g.decimals; i++)
        half /= 10;
    const bool low = p < half;
    const bool high = p > 1 - half;
    if (low)
        text_add(out, "<");
    else if (high)
        text_add(out, ">");
    figure_number(out, low ? 2 * half : high ? 1 - 2 * half : p, g);
}

void figure_share(struct text *out, double share)
{
    figure_number(out, 100 * share, (struct digits){1, 0});
    if (!isnan(share))
        text_add(out, "%");
}

void figure_count(struct text *out, double n)
{
    figure_number(out, n, (struct digits){0, 0});
}

void figure_error(struct text *out, double mcse)
{
    char s[NUMBER_CHARS];
    text_add(out, isnan(mcse) ? number_fixed(s, mcse, 0) : number_significant(s, mcse, 2));
}

/* ---- getters ---- */

bool level_can_be_target(const struct analysis_report *r, size_t level)
{
    return design_is_active(r->d, level) && r->a->level[level].open;
}

bool likelihood_is_shown(const struct analysis *a)
{
    return a->likelihood.exists && a->likelihood.converged;
}

bool likelihood_has_levels(const struct analysis *a)
{
    for (size_t k = 0; k < a->levels && likelihood_is_shown(a); k++)
        if (!isnan(a->likelihood.response[k]))
            return true;
    return false;
}

double share_so_far(const struct analysis_report *r, size_t level)
{
    const double n = (double)r->data->subjects;
    return n > 0 ? r->data->by_level.randomized[level] / n : 0;
}

bool has_next_shares(const struct analysis_report *r)
{
    for (size_t k = 0; k < r->a->levels; k++)
        if (r->a->diagnostics.trusted && !isnan(r->a->level[k].next_share))
            return true;
    return false;
}

static bool is_reference(const struct analysis_report *r, size_t level)
{
    return !r->d->has_reference_number && (int)level == r->d->reference_level;
}

static double randomized(const struct analysis_report *r, size_t level)
{
    return r->data->by_level.randomized[level];
}

static double observed(const struct analysis_report *r, size_t level)
{
    return r->data->by_level.n[level];
}

static struct raw_figures raw(const struct analysis_report *r, size_t level)
{
    return raw_interval(&r->data->by_level, r->d->type, level);
}

static double raw_mean(const struct analysis_report *r, size_t level)
{
    return raw(r, level).mean;
}

static double raw_sd(const struct analysis_report *r, size_t level)
{
    return raw(r, level).sd;
}

static double raw_low(const struct analysis_report *r, size_t level)
{
    return raw(r, level).low;
}

static double raw_high(const struct analysis_report *r, size_t level)
{
    return raw(r, level).high;
}

static double response_mean(const struct analysis_report *r, size_t level)
{
    return r->a->level[level].response.mean;
}

static double response_sd(const struct analysis_report *r, size_t level)
{
    return r->a->level[level].response.sd;
}

static double response_low(const struct analysis_report *r, size_t level)
{
    return r->a->level[level].response.q025;
}

static double response_high(const struct analysis_report *r, size_t level)
{
    return r->a->level[level].response.q975;
}

static double likelihood_response(const struct analysis_report *r, size_t level)
{
    return likelihood_is_shown(r->a) ? r->a->likelihood.response[level] : NAN;
}

static double gain_mean(const struct analysis_report *r, size_t level)
{
    return is_reference(r, level) ? NAN : r->a->level[level].gain.mean;
}

static double gain_low(const struct analysis_report *r, size_t level)
{
    return is_reference(r, level) ? NAN : r->a->level[level].gain.q025;
}

static double gain_high(const struct analysis_report *r, size_t level)
{
    return is_reference(r, level) ? NAN : r->a->level[level].gain.q975;
}

static double gain_positive(const struct analysis_report *r, size_t level)
{
    return is_reference(r, level) ? NAN : r->a->level[level].pr_positive;
}

static double next_share(const struct analysis_report *r, size_t level)
{
    return r->a->diagnostics.trusted ? r->a->level[level].next_share : NAN;
}

/* ---- the table ---- */

static const struct level_figure level_figures[] = {
    {"randomized", {"Randomized", "Randomized"}, UNIT_COUNT, NEEDS_NOTHING, randomized, NULL},
    {"so_far", {"Share so far", "Share so far"}, UNIT_SHARE, NEEDS_NOTHING, share_so_far, NULL},
    {"observed", {"Outcomes", "Outcomes"}, UNIT_COUNT, NEEDS_NOTHING, observed, NULL},
    {"raw", {"Raw mean", "Raw rate"}, UNIT_RESPONSE, NEEDS_NOTHING, raw_mean, NULL},
    {"raw_sd", {"Raw SD", "Raw SD"}, UNIT_RESPONSE, NEEDS_SD, raw_sd, NULL},
    {"raw_interval", {"Raw 95%", "Raw 95%"}, UNIT_RESPONSE, NEEDS_NOTHING, raw_low, raw_high},
    {"mean",
     {"Posterior mean", "Posterior rate"},
     UNIT_RESPONSE,
     NEEDS_NOTHING,
     response_mean,
     NULL},
    {"sd", {"Posterior SD", "Posterior SD"}, UNIT_RESPONSE, NEEDS_NOTHING, response_sd, NULL},
    {"interval",
     {"Posterior 95%", "Posterior 95%"},
     UNIT_RESPONSE,
     NEEDS_NOTHING,
     response_low,
     response_high},
    {"likelihood",
     {"Likelihood mean", "Likelihood rate"},
     UNIT_RESPONSE,
     NEEDS_LIKELIHOOD,
     likelihood_response,
     NULL},
    {"gain", {"Gain", "Gain"}, UNIT_RESPONSE, NEEDS_GAIN, gain_mean, NULL},
    {"gain_interval", {"Gain 95%", "Gain 95%"}, UNIT_RESPONSE, NEEDS_GAIN, gain_low, gain_high},
    {"gain_positive",
     {"Pr(gain > 0)", "Pr(gain > 0)"},
     UNIT_PROBABILITY,
     NEEDS_GAIN,
     gain_positive,
     NULL},
    {"next_share", {"Next share", "Next share"}, UNIT_SHARE, NEEDS_NOTHING, next_share, NULL},
};

const struct level_figure *level_figure_find(const char *key)
{
    for (size_t i = 0; i < COUNT_OF(level_figures); i++)
        if (strcmp(level_figures[i].key, key) == 0)
            return &level_figures[i];
    BUG("no such figure by level");
}

bool level_figure_exists(const struct level_figure *f, const struct analysis_report *r)
{
    if (f->needs == NEEDS_GAIN)
        return design_has_gain(r->d);
    if (f->needs == NEEDS_LIKELIHOOD)
        return likelihood_has_levels(r->a);
    return f->needs == NEEDS_NOTHING || r->d->type == ENDPOINT_CONTINUOUS;
}

void level_figure_add(struct text *out, const struct level_figure *f,
                      const struct analysis_report *r, size_t level)
{
    const double x = f->get(r, level);
    if (f->unit == UNIT_COUNT)
        figure_count(out, x);
    else if (f->unit == UNIT_SHARE)
        figure_share(out, x);
    else if (f->unit == UNIT_PROBABILITY)
        figure_probability(out, x, digits_target(r));
    else if (f->upper)
        figure_interval(out, x, f->upper(r, level), digits_response(r));
    else
        figure_number(out, x, digits_response(r));
}
