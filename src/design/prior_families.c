/* SPDX-License-Identifier: GPL-3.0-or-later */
/* prior_families.c: the families of priors, one row each, and their functions. */
#include "design/prior_families.h"

#include <math.h>
#include <string.h>

#include "base/vecmath.h"
#include "design/special.h"

#define LN_2 0.69314718055994530942
#define HALF_LN_2_PI 0.91893853320467274178
#define MEAN_HALF 0.79788456080286535588 /* sqrt(2 / pi) */
#define SD_HALF 0.60281027498908693428   /* sqrt(1 - 2 / pi) */
/* shapes and degrees of freedom: below, most quantiles are no numbers any more; above, digits go */
#define LEAST_SHAPE 0.001
#define MOST_SHAPE 1e6

/* --- normal: mean, sd --- */

static void normal_log_density(const double *arg, size_t n, const double *x, const double *log_x,
                               double *out)
{
    const double mean = arg[0], sd = arg[1], top = -HALF_LN_2_PI - vm_log(sd);

    (void)log_x;
    for (size_t i = 0; i < n; i++) {
        const double z = (x[i] - mean) / sd;
        out[i] = top - 0.5 * z * z;
    }
}

static double normal_cdf(const double *arg, double x)
{
    return vm_normal_cdf((x - arg[0]) / arg[1]);
}

static double normal_quantile(const double *arg, double p)
{
    return arg[0] + arg[1] * vm_normal_quantile(p);
}

static double normal_upper(const double *arg, double x)
{
    return vm_normal_cdf((arg[0] - x) / arg[1]);
}

static double normal_quantile_upper(const double *arg, double q)
{
    return arg[0] - arg[1] * vm_normal_quantile(q);
}

static double normal_mean(const double *arg)
{
    return arg[0];
}

static double normal_sd(const double *arg)
{
    return arg[1];
}

/* --- half_normal: sd of the whole normal --- */

static void half_normal_log_density(const double *arg, size_t n, const double *x,
                                    const double *log_x, double *out)
{
    const double inverse = 1.0 / arg[0], top = LN_2 - HALF_LN_2_PI - vm_log(arg[0]);

    (void)log_x;
    for (size_t i = 0; i < n; i++) {
        const double z = x[i] * inverse, inside = top - 0.5 * z * z;
        out[i] = x[i] < 0.0 ? -INFINITY : inside;
    }
}

static double half_normal_cdf(const double *arg, double x)
{
    return x <= 0.0 ? 0.0 : special_normal_within(x / arg[0]);
}

static double half_normal_upper(const double *arg, double x)
{
    return x <= 0.0 ? 1.0 : 2.0 * vm_normal_cdf(-x / arg[0]);
}

static double half_normal_quantile_upper(const double *arg, double q)
{
    return -arg[0] * vm_normal_quantile(0.5 * q);
}

static double half_normal_quantile(const double *arg, double p)
{
    return -arg[0] * vm_normal_quantile(0.5 * (1.0 - p));
}

static double half_normal_mean(const double *arg)
{
    return MEAN_HALF * arg[0];
}

static double half_normal_sd(const double *arg)
{
    return SD_HALF * arg[0];
}

/* --- lognormal: meanlog, sdlog --- */

static void lognormal_log_density(const double *arg, size_t n, const double *x, const double *log_x,
                                  double *out)
{
    const double mean = arg[0], inverse = 1.0 / arg[1], top = -HALF_LN_2_PI - vm_log(arg[1]);

    for (size_t i = 0; i < n; i++) {
        const double z = (log_x[i] - mean) * inverse, inside = top - 0.5 * z * z - log_x[i];
        out[i] = x[i] > 0.0 ? inside : -INFINITY;
    }
}

static double lognormal_cdf(const double *arg, double x)
{
    return x <= 0.0 ? 0.0 : vm_normal_cdf((vm_log(x) - arg[0]) / arg[1]);
}

static double lognormal_quantile(const double *arg, double p)
{
    return vm_exp(arg[0] + arg[1] * vm_normal_quantile(p));
}

static double lognormal_upper(const double *arg, double x)
{
    return x <= 0.0 ? 1.0 : vm_normal_cdf((arg[0] - vm_log(x)) / arg[1]);
}

static double lognormal_quantile_upper(const double *arg, double q)
{
    return vm_exp(arg[0] - arg[1] * vm_normal_quantile(q));
}

static double lognormal_mean(const double *arg)
{
    return vm_exp(arg[0] + 0.5 * arg[1] * arg[1]);
}

/* e^t - 1 without cancellation near 0. */
static double exp_minus_1(double t)
{
    double sum = 1.0;

    if (t > 0.1)
        return vm_exp(t) - 1.0;
    for (int k = 12; k >= 2; k--)
        sum = 1.0 + t / k * sum;
    return t * sum;
}

static double lognormal_sd(const double *arg)
{
    return lognormal_mean(arg) * __builtin_sqrt(exp_minus_1(arg[1] * arg[1]));
}

/* --- uniform: min, max --- */

static void uniform_log_density(const double *arg, size_t n, const double *x, const double *log_x,
                                double *out)
{
    const double low = arg[0], high = arg[1], inside = -vm_log(high - low);

    (void)log_x;
    for (size_t i = 0; i < n; i++)
        out[i] = ((x[i] >= low) & (x[i] <= high)) ? inside : -INFINITY;
}

static double uniform_cdf(const double *arg, double x)
{
    if (x <= arg[0])
        return 0.0;
    return x >= arg[1] ? 1.0 : (x - arg[0]) / (arg[1] - arg[0]);
}

static double uniform_quantile(const double *arg, double p)
{
    return arg[0] + p * (arg[1] - arg[0]);
}

static double uniform_upper(const double *arg, double x)
{
    if (x >= arg[1])
        return 0.0;
    return x <= arg[0] ? 1.0 : (arg[1] - x) / (arg[1] - arg[0]);
}

static double uniform_quantile_upper(const double *arg, double q)
{
    return arg[1] - q * (arg[1] - arg[0]);
}

static double uniform_mean(const double *arg)
{
    return arg[0] + 0.5 * (arg[1] - arg[0]);
}

static double uniform_sd(const double *arg)
{
    return (arg[1] - arg[0]) / __builtin_sqrt(12.0);
}

/* --- gamma: shape, rate --- */

static void gamma_log_density(const double *arg, size_t n, const double *x, const double *log_x,
                              double *out)
{
    const double top = arg[0] * vm_log(arg[1]) - special_log_gamma(arg[0]);

    for (size_t i = 0; i < n; i++) {
        const double power = arg[0] == 1.0 ? 0.0 : (arg[0] - 1.0) * log_x[i]; /* ln 0 at x = 0 */
        const double inside = top + power - arg[1] * x[i];
        out[i] = x[i] < 0.0 ? -INFINITY : inside;
    }
}

static double gamma_cdf(const double *arg, double x)
{
    return special_gamma_tail(arg[0], arg[1] * x, false);
}

static double gamma_upper(const double *arg, double x)
{
    return special_gamma_tail(arg[0], arg[1] * x, true);
}

static double gamma_quantile(const double *arg, double p)
{
    return special_gamma_quantile(arg[0], p, false) / arg[1];
}

static double gamma_quantile_upper(const double *arg, double q)
{
    return special_gamma_quantile(arg[0], q, true) / arg[1];
}

static double gamma_mean(const double *arg)
{
    return arg[0] / arg[1];
}

static double gamma_sd(const double *arg)
{
    return __builtin_sqrt(arg[0]) / arg[1];
}

/* --- inverse_gamma: shape, scale --- */

static void inverse_gamma_log_density(const double *arg, size_t n, const double *x,
                                      const double *log_x, double *out)
{
    const double top = arg[0] * vm_log(arg[1]) - special_log_gamma(arg[0]);

    for (size_t i = 0; i < n; i++) {
        const double inside = top - (arg[0] + 1.0) * log_x[i] - arg[1] / x[i];
        out[i] = x[i] > 0.0 ? inside : -INFINITY;
    }
}

static double inverse_gamma_cdf(const double *arg, double x)
{
    return x <= 0.0 ? 0.0 : special_gamma_tail(arg[0], arg[1] / x, true);
}

static double inverse_gamma_upper(const double *arg, double x)
{
    return x <= 0.0 ? 1.0 : special_gamma_tail(arg[0], arg[1] / x, false);
}

static double inverse_gamma_quantile(const double *arg, double p)
{
    return arg[1] / special_gamma_quantile(arg[0], p, true);
}

static double inverse_gamma_quantile_upper(const double *arg, double q)
{
    return arg[1] / special_gamma_quantile(arg[0], q, false);
}

static double inverse_gamma_mean(const double *arg)
{
    return arg[0] > 1.0 ? arg[1] / (arg[0] - 1.0) : INFINITY;
}

static double inverse_gamma_sd(const double *arg)
{
    if (arg[0] <= 1.0)
        return NAN;
    return arg[0] > 2.0 ? inverse_gamma_mean(arg) / __builtin_sqrt(arg[0] - 2.0) : INFINITY;
}

/* --- student_t: df, location, scale --- */

static void student_t_log_density(const double *arg, size_t n, const double *x, const double *log_x,
                                  double *out)
{
    const double df = arg[0], inverse = 1.0 / arg[2];
    const double top = special_t_log_density_top(df) - vm_log(arg[2]);

    (void)log_x;
    for (size_t i = 0; i < n; i++) {
        const double z = (x[i] - arg[1]) * inverse;
        out[i] = top - 0.5 * (df + 1.0) * vm_log(1.0 + z * z / df);
    }
}

static double student_t_cdf(const double *arg, double x)
{
    return special_t_tail(arg[0], (x - arg[1]) / arg[2], false);
}

static double student_t_upper(const double *arg, double x)
{
    return special_t_tail(arg[0], (x - arg[1]) / arg[2], true);
}

static double student_t_quantile(const double *arg, double p)
{
    return arg[1] + arg[2] * special_t_quantile(arg[0], p, false);
}

static double student_t_quantile_upper(const double *arg, double q)
{
    return arg[1] + arg[2] * special_t_quantile(arg[0], q, true);
}

static double student_t_mean(const double *arg)
{
    return arg[0] > 1.0 ? arg[1] : NAN;
}

static double student_t_sd(const double *arg)
{
    if (arg[0] <= 1.0)
        return NAN;
    return arg[0] > 2.0 ? arg[2] * __builtin_sqrt(arg[0] / (arg[0] - 2.0)) : INFINITY;
}

/* moments of lower order exist */
static double inverse_gamma_moments(const double *arg)
{
    return arg[0];
}

static double student_t_moments(const double *arg)
{
    return arg[0];
}

/* --- the list --- */

const struct prior_family prior_family_normal = {
    .key = "normal",
    .sentence = "normal",
    .args = {{"mean", false, "mean"}, {"sd", true, "standard deviation"}},
    .support_low = -INFINITY,
    .log_density = normal_log_density,
    .cdf = normal_cdf,
    .upper = normal_upper,
    .quantile = normal_quantile,
    .quantile_upper = normal_quantile_upper,
    .mean = normal_mean,
    .sd = normal_sd,
};

const struct prior_family prior_family_half_normal = {
    .key = "half_normal",
    .sentence = "half-normal",
    .args = {{"sd", true, "standard deviation of the whole normal, before it is cut at 0"}},
    .support_low = 0,
    .log_density = half_normal_log_density,
    .cdf = half_normal_cdf,
    .upper = half_normal_upper,
    .quantile = half_normal_quantile,
    .quantile_upper = half_normal_quantile_upper,
    .mean = half_normal_mean,
    .sd = half_normal_sd,
};

const struct prior_family prior_family_lognormal = {
    .key = "lognormal",
    .sentence = "lognormal",
    .args = {{"meanlog", false, "mean of the natural logarithm"},
             {"sdlog", true, "standard deviation of the natural logarithm"}},
    .support_low = 0,
    .log_density = lognormal_log_density,
    .cdf = lognormal_cdf,
    .upper = lognormal_upper,
    .quantile = lognormal_quantile,
    .quantile_upper = lognormal_quantile_upper,
    .mean = lognormal_mean,
    .sd = lognormal_sd,
};

const struct prior_family prior_family_gamma = {
    .key = "gamma",
    .least = LEAST_SHAPE,
    .most = MOST_SHAPE,
    .sentence = "gamma",
    .args = {{"shape", true, "shape"}, {"rate", true, "rate; the mean is shape / rate"}},
    .support_low = 0,
    .log_density = gamma_log_density,
    .cdf = gamma_cdf,
    .upper = gamma_upper,
    .quantile = gamma_quantile,
    .quantile_upper = gamma_quantile_upper,
    .mean = gamma_mean,
    .sd = gamma_sd,
};

const struct prior_family prior_family_inverse_gamma = {
    .key = "inverse_gamma",
    .least = LEAST_SHAPE,
    .most = MOST_SHAPE,
    .sentence = "inverse gamma",
    .args = {{"shape", true, "shape"},
             {"scale", true, "scale; the mean is scale / (shape - 1) when shape is above 1"}},
    .support_low = 0,
    .log_density = inverse_gamma_log_density,
    .cdf = inverse_gamma_cdf,
    .upper = inverse_gamma_upper,
    .quantile = inverse_gamma_quantile,
    .quantile_upper = inverse_gamma_quantile_upper,
    .moments_below = inverse_gamma_moments,
    .mean = inverse_gamma_mean,
    .sd = inverse_gamma_sd,
};

const struct prior_family prior_family_uniform = {
    .key = "uniform",
    .sentence = "uniform",
    .args = {{"min", false, "lower end"}, {"max", false, "upper end"}},
    .support_low = -INFINITY,
    .log_density = uniform_log_density,
    .cdf = uniform_cdf,
    .upper = uniform_upper,
    .quantile = uniform_quantile,
    .quantile_upper = uniform_quantile_upper,
    .mean = uniform_mean,
    .sd = uniform_sd,
};

const struct prior_family prior_family_student_t = {
    .key = "student_t",
    .least = LEAST_SHAPE,
    .most = MOST_SHAPE,
    .sentence = "Student t",
    .two_sided = true,
    .args = {{"df", true, "degrees of freedom"},
             {"location", false, "centre"},
             {"scale", true, "scale; the standard deviation is larger, infinite up to df 2"}},
    .support_low = -INFINITY,
    .log_density = student_t_log_density,
    .cdf = student_t_cdf,
    .upper = student_t_upper,
    .quantile = student_t_quantile,
    .quantile_upper = student_t_quantile_upper,
    .moments_below = student_t_moments,
    .mean = student_t_mean,
    .sd = student_t_sd,
};

const struct prior_family prior_family_fixed = {
    .key = "fixed",
    .sentence = "a known value: the parameter is not estimated",
    .args = {{"value", false, "the known value"}},
    .support_low = -INFINITY,
};

const struct prior_family *const prior_families[] = {
    &prior_family_normal,    &prior_family_half_normal,   &prior_family_lognormal,
    &prior_family_gamma,     &prior_family_inverse_gamma, &prior_family_uniform,
    &prior_family_student_t, &prior_family_fixed,         NULL};

const struct prior_family *prior_family_find(const char *key)
{
    for (size_t i = 0; prior_families[i] != NULL; i++)
        if (strcmp(prior_families[i]->key, key) == 0)
            return prior_families[i];
    return NULL;
}
