/* SPDX-License-Identifier: GPL-3.0-or-later */
/* prior.h: prior distributions of one number: the contract of a family, and the one list.
 *
 * A family is one const row; adding one is a row and its functions. x and its logarithm are handed
 * over together because samplers often walk in ln x.
 */
#ifndef TERRACE_PRIOR_H
#define TERRACE_PRIOR_H

#include <stdbool.h>
#include <stddef.h>

enum { PRIOR_ARGS = 3 };

struct prior_arg {
    const char *key; /* "mean", "sd", "shape", ...: names fixed by the interface */
    bool positive;   /* must be > 0 */
    const char *help;
};

struct prior_family {
    const char *key;
    const char *sentence;              /* printf-free description for people, e.g. "normal" */
    struct prior_arg args[PRIOR_ARGS]; /* key NULL ends the list */
    double support_low; /* -INFINITY or 0: lowest x with density > 0 (normal, uniform,
                           student_t: -INFINITY; uniform is checked by its min) */
    /* Normalised log density at n points; log_x may be NULL when support_low is -INFINITY. No
     * truncation. NULL: this version cannot sample it (refused by analyze). */
    void (*log_density)(const double *arg, size_t n, const double *x, const double *log_x,
                        double *out);
    double (*cdf)(const double *arg, double x);      /* NULL as above */
    double (*quantile)(const double *arg, double p); /* NULL as above; 0 < p < 1 */
    double (*mean)(const double *arg);               /* +-INFINITY or NaN where it does not exist */
    double (*sd)(const double *arg);
};

/* A prior in force. `fixed` has arg[0] = value and its functions are never called.
 * Truncation: above < x < below, renormalised; -INFINITY / INFINITY when absent. */
struct prior {
    const struct prior_family *family; /* NULL: not set */
    double arg[PRIOR_ARGS];
    double above, below;
    bool on_variance; /* the prior is on the square of the number it is filed under */
};

extern const struct prior_family *const prior_families[]; /* NULL-terminated; the only list */

const struct prior_family *prior_family_find(const char *key);
bool prior_is_fixed(const struct prior *p);
bool prior_is_truncated(const struct prior *p);
/* Whether quantiles and densities can be computed by this version (no truncation yet, a family
 * with functions). */
bool prior_is_computable(const struct prior *p);

struct prior prior_normal(double mean, double sd);
struct prior prior_half_normal(double sd);
struct prior prior_lognormal(double meanlog, double sdlog);
struct prior prior_fixed(double value);

/* On the number itself (a standard deviation even when the prior is on the variance). */
double prior_quantile(const struct prior *p, double q);
/* Log density of the number itself at n points (with the Jacobian of on_variance). */
void prior_log_density(const struct prior *p, size_t n, const double *x, const double *log_x,
                       double *out);
void prior_support(const struct prior *p, double *low, double *high);
double prior_mean(const struct prior *p);
double prior_sd(const struct prior *p); /* NaN when unknown or infinite; 0 for fixed */

#endif
