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
    double least, most; /* of args[0]: where our arithmetic is right; 0, 0: as its row says */
    double support_low; /* -INFINITY or 0: lowest x with density > 0 (normal, uniform,
                           student_t: -INFINITY; uniform is checked by its min) */
    /* Normalised log density at n points; log_x may be NULL when support_low is -INFINITY. No
     * truncation. NULL for `fixed`, as the functions below. */
    void (*log_density)(const double *arg, size_t n, const double *x, const double *log_x,
                        double *out);
    /* Pr(X < x) and Pr(X > x), each with its digits where it is small, and their inverses for
     * 0 < p < 1. */
    double (*cdf)(const double *arg, double x);
    double (*upper)(const double *arg, double x);
    double (*quantile)(const double *arg, double p);
    double (*quantile_upper)(const double *arg, double q);
    /* Moments below this order exist (of the upper tail; two_sided: of the lower as well); NULL:
     * all do. */
    double (*moments_below)(const double *arg);
    bool two_sided;
    double (*mean)(const double *arg); /* +-INFINITY or NaN where it does not exist */
    double (*sd)(const double *arg);
};

/* A prior in force. `fixed` has arg[0] = value and its functions are never called.
 * Truncation: above < x < below, renormalised; -INFINITY / INFINITY when absent. */
struct prior {
    const struct prior_family *family; /* NULL: not set */
    double arg[PRIOR_ARGS];
    double above, below;
    bool on_variance; /* the prior is on the square of the number it is filed under */
    double log_mass;  /* ln of the mass between the cuts: prior_settle; 0 without cuts */
};

extern const struct prior_family *const prior_families[]; /* NULL-terminated; the only list */

const struct prior_family *prior_family_find(const char *key);
bool prior_is_fixed(const struct prior *p);
bool prior_is_truncated(const struct prior *p);
/* The mass between the cuts; below PRIOR_LEAST_MASS a cut prior is refused. */
#define PRIOR_LEAST_MASS 1e-200
double prior_mass(const struct prior *p);
/* After the cuts are set: fills log_mass. */
void prior_settle(struct prior *p);
/* The closed interval of the number itself outside which the density is 0. */
void prior_support(const struct prior *p, double *low, double *high);

struct prior prior_normal(double mean, double sd);
struct prior prior_half_normal(double sd);
struct prior prior_lognormal(double meanlog, double sdlog);
struct prior prior_fixed(double value);

/* On the number itself (a standard deviation even when the prior is on the variance). */
double prior_quantile(const struct prior *p, double q);
/* Log density of the number itself at n points (with the Jacobian of on_variance). */
void prior_log_density(const struct prior *p, size_t n, const double *x, const double *log_x,
                       double *out);
/* NaN where the moment does not exist; sd 0 for fixed. Closed forms, else by double exponential
 * quadrature over the quantile function (Takahasi & Mori 1974, Publ. RIMS Kyoto 9:721). */
double prior_mean(const struct prior *p);
double prior_sd(const struct prior *p);

#endif
