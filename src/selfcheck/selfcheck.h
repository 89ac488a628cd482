/* SPDX-License-Identifier: GPL-3.0-or-later */
/* selfcheck.h: the built-in checks: what was published, what this program computes, how far apart
 * they may lie.
 *
 * A check is one row of one table. Its function computes figures from an input that a test can
 * nudge: with nudge 0 every figure must pass, with another nudge at least one must fail.
 */
#ifndef TERRACE_SELFCHECK_H
#define TERRACE_SELFCHECK_H

#include <stdbool.h>
#include <stddef.h>

/* One value. Texts (digests) compare as a whole: difference 0 or 1, allowed 0. */
struct check_figure {
    char *what; /* owned */
    double published, ours, allowed;
    char *published_text, *ours_text; /* owned; NULL: numbers */
    bool passed;
};

struct check_result {
    const struct check *check;
    size_t count, capacity;
    struct check_figure *figure; /* owned */
    bool passed;                 /* all figures, and there is at least one */
};

struct check {
    const char *key;
    const char *group;  /* heading under which it stands */
    const char *source; /* author, year, title or table; "(from memory)" where recalled */
    const char *what;   /* what is computed, and why so much difference is allowed */
    void (*run)(struct check_result *r, double nudge);
    bool nine_digits; /* results of an optimiser: 9 significant digits are shown */
};

extern const struct check *const checks[]; /* NULL-terminated, in the order of the report */

/* The numbers of one check. */
void check_run(struct check_result *out, const struct check *c, double nudge);
void check_release(struct check_result *r);

/* For checks: adds a figure; passes where |ours - published| <= allowed. */
void check_add(struct check_result *r, double published, double ours, double allowed,
               const char *what, ...) __attribute__((format(printf, 5, 6)));
void check_add_text(struct check_result *r, const char *published, const char *ours,
                    const char *what);
/* allowed: half a unit of the last of so many significant digits of `published` */
double check_digits(double published, int digits);

/* All checks, as the command runs them; `told` (may be NULL) hears of each before it starts. */
struct selfcheck {
    size_t count, passed, failed;
    struct check_result *result; /* owned */
};
void selfcheck_run(struct selfcheck *out, void (*told)(const struct check *c));
void selfcheck_release(struct selfcheck *s);

#endif
