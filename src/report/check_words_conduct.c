/* SPDX-License-Identifier: GPL-3.0-or-later */
/* check_words_conduct.c: allocation, analyses, accrual and dropout as sentences. */
#include <math.h>

#include "report/check_words.h"

static bool all_equal(const double *x, size_t n)
{
    for (size_t i = 1; i < n; i++) {
        if (x[i] < x[0] || x[i] > x[0]) {
            return false;
        }
    }
    return true;
}

/* "1 : 1 : 2" */
static void add_ratio(struct text *out, const struct design *d)
{
    for (size_t k = 0; k < d->levels; k++) {
        text_add(out, k ? " : " : "");
        add_shortest_number(out, d->allocation.ratio[k]);
    }
}

void say_start(struct text *out, const struct design *d)
{
    const struct allocation *a = &d->allocation;
    if (a->adapts && a->start_per_level > 0) {
        text_add(out, "At least the first ");
        add_shortest_number(out, a->start_per_level * (double)d->levels);
        text_add(out, " subjects are");
    } else {
        text_add(out, a->adapts ? "Until the first adapted shares are in force subjects are"
                                : "All subjects are");
    }
    text_add(out, " randomized ");
    if (all_equal(a->ratio, d->levels)) {
        text_add(out, "equally over the levels");
    } else {
        text_add(out, "in the ratio ");
        add_ratio(out, d);
        text_add(out, " (levels in list order)");
    }
    if (a->block > 1) {
        text_add(out, ", in permuted blocks of ");
        add_shortest_number(out, a->block);
    } else {
        text_add(out, ", each on its own");
    }
    text_add(out, ".");
}

static void add_formula(struct text *out, const struct design *d)
{
    const struct allocation *a = &d->allocation;
    text_addf(out, "Then shares follow the probability that a level is %s",
              d->target[a->adapt_target].name);
    if (a->power_kind == POWER_N_OVER_2N) {
        text_add(out, ", raised to n/2N (n randomized so far of N subjects)");
    } else if (a->power < 1 || a->power > 1) {
        text_add(out, ", raised to the power ");
        add_shortest_number(out, a->power);
    }
    if (a->information > 0) {
        text_add(out, ", times the variance of its response per subject to the power ");
        add_shortest_number(out, a->information);
    }
    text_add(out, ".");
}

/* at_least or at_most of active levels, where they say something. */
static void add_bounds(struct text *out, const struct design *d, const double *bound, double idle,
                       const char *word)
{
    bool any = false;
    for (size_t k = 0; k < d->levels; k++) {
        if (design_is_active(d, k) && (bound[k] < idle || bound[k] > idle)) {
            text_addf(out, "%s %s ", any ? "," : word, d->level[k].label);
            add_shortest_number(out, bound[k]);
            any = true;
        }
    }
    text_add(out, any ? "." : "");
}

static void add_control_share(struct text *out, const struct design *d)
{
    const struct allocation *a = &d->allocation;
    if (a->control_kind == CONTROL_SHARE_AS_LARGEST) {
        text_add(out, " The control gets as much as the largest active level.");
    } else if (a->control_kind == CONTROL_SHARE_NUMBER && d->control >= 0) {
        text_add(out, " The control keeps the share ");
        add_shortest_number(out, a->control_share);
        text_add(out, ".");
    }
}

void say_adapt(struct text *out, const struct design *d)
{
    const struct allocation *a = &d->allocation;
    if (!a->adapts) {
        text_add(out, "Shares do not adapt.");
        return;
    }
    add_formula(out, d);
    if (a->drop_below > 0) {
        text_add(out, " A share below ");
        add_shortest_number(out, a->drop_below);
        text_add(out, " becomes 0 until a later analysis earns it back.");
    }
    add_bounds(out, d, a->at_least, 0, " Least shares:");
    add_bounds(out, d, a->at_most, 1, " Largest shares:");
    add_control_share(out, d);
    if (a->urn) {
        text_add(out, " Levels are drawn from a mass weighted urn (mass ");
        add_shortest_number(out, a->urn_mass);
        text_add(out, ").");
    } else {
        text_add(out, " Levels are drawn independently from the shares.");
    }
}

static const char *counted_word(const struct design *d)
{
    switch (d->analyses.counted) {
    case COUNTED_RANDOMIZED:
        return "randomized";
    case COUNTED_OBSERVED:
        return "observed";
    default:
        return NULL;
    }
}

void say_point(struct text *out, const struct design *d, double point)
{
    const char *word = counted_word(d);
    if (word) {
        add_shortest_number(out, point);
        text_addf(out, " %s", word);
    } else {
        text_addf(out, "%s ", d->time_unit);
        add_shortest_number(out, point);
    }
}

void say_analyses(struct text *out, const struct design *d)
{
    const struct analyses *a = &d->analyses;
    add_shortest_number(out, d->subjects);
    text_add(out, " subjects at most. ");
    if (a->count == 0) {
        text_add(out, "No interim analysis is planned; one analysis of all data at the end.");
        return;
    }
    text_addf(out, "%zu interim anal%s planned, counted by %s", a->count,
              a->count == 1 ? "ysis is" : "yses are",
              a->counted == COUNTED_RANDOMIZED ? "subjects randomized"
              : a->counted == COUNTED_OBSERVED ? "outcomes in hand"
                                               : "time since opening");
    if (a->first_at > 0) {
        text_add(out, ": first at ");
        add_shortest_number(out, a->first_at);
        text_add(out, ", then every ");
        add_shortest_number(out, a->every);
    }
    if (a->open_ended) {
        text_add(out, ", while enrolment is open");
    }
    text_add(out, "; the last analysis is extra.");
    if (a->lag > 0) {
        text_add(out, " New shares and stops take effect ");
        say_time(out, d, a->lag);
        text_add(out, " after the data cut.");
    }
}

void say_accrual(struct text *out, const struct design *d)
{
    const struct accrual *a = &d->accrual;
    if (a->count == 0) {
        text_add(out, "Accrual rates are not given, so times and pending outcomes cannot be "
                      "foreseen.");
        return;
    }
    text_add(out, "Accrual:");
    for (size_t i = 0; i < a->count; i++) {
        text_add(out, i ? ", then " : " ");
        add_shortest_number(out, a->steps[i].rate);
        text_addf(out, " subjects a %s", d->time_unit);
        if (i > 0) {
            text_addf(out, " from %s ", d->time_unit);
            add_shortest_number(out, a->steps[i].from);
        }
    }
    text_add(out, ".");
}

void say_dropout(struct text *out, const struct design *d)
{
    if (all_equal(d->dropout, d->levels)) {
        text_add(out, "Dropout before the outcome: ");
        add_shortest_number(out, 100 * d->dropout[0]);
        text_add(out, "% of subjects.");
        return;
    }
    text_add(out, "Dropout before the outcome by level:");
    for (size_t k = 0; k < d->levels; k++) {
        text_addf(out, "%s %s ", k ? "," : "", d->level[k].label);
        add_shortest_number(out, 100 * d->dropout[k]);
        text_add(out, "%");
    }
    text_add(out, ".");
}
