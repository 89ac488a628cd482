/* SPDX-License-Identifier: GPL-3.0-or-later */
/* test_prior_edges.c: priors at the edge of what is allowed: moments that only just exist, thin
 * tails, the least and largest shapes. */
#include <gsl/gsl_cdf.h>
#include <gsl/gsl_sf_gamma.h>
#include <math.h>

#include "base/base.h"
#include "design/prior.h"
#include "design/special.h"
#include "unit.h"

#define PI 3.14159265358979323846

static struct prior make(const char *key, double a, double b, double c, double above)
{
    struct prior p = {
        .family = prior_family_find(key), .arg = {a, b, c}, .above = above, .below = INFINITY};
    prior_settle(&p);
    return p;
}

static bool near(double a, double b, double relative)
{
    return fabs(a - b) <= relative * fabs(b);
}

/* Half a Student t: mean 2 sqrt(df / pi) Gamma((df + 1) / 2) / (Gamma(df / 2) (df - 1)), second
 * moment df / (df - 2). Its mirror image and a shift have the same spread. */
static void half_student_t(void)
{
    static const double dfs[] = {1.01, 1.1, 1.5, 2.001, 2.01, 2.05, 2.2, 2.23, 3, 30};
    for (size_t i = 0; i < COUNT_OF(dfs); i++) {
        const double df = dfs[i], mean = 2 * sqrt(df / PI) / (df - 1) *
                                         exp(gsl_sf_lngamma((df + 1) / 2) - gsl_sf_lngamma(df / 2));
        const struct prior p = make("student_t", df, 0, 1, 0);
        struct prior mirror = make("student_t", df, 5, 2, -INFINITY);
        mirror.below = 5;
        prior_settle(&mirror);
        CU_ASSERT(near(prior_mean(&p), mean, 1e-9));
        CU_ASSERT(near(prior_mean(&mirror), 5 - 2 * mean, 1e-8));
        if (df > 2) {
            const double sd = sqrt(df / (df - 2) - mean * mean);
            CU_ASSERT(near(prior_sd(&p), sd, 1e-8));
            CU_ASSERT(near(prior_sd(&mirror), 2 * sd, 1e-8));
        } else {
            CU_ASSERT(isnan(prior_sd(&p)));
        }
    }
}

/* V inverse gamma(a, b): E sqrt(V) = sqrt(b) Gamma(a - 1/2) / Gamma(a), E V = b / (a - 1). */
static void sd_of_an_inverse_gamma_variance(void)
{
    static const double shapes[] = {0.51, 0.6, 1, 1.001, 1.02, 1.1, 1.2, 3, 50};
    for (size_t i = 0; i < COUNT_OF(shapes); i++) {
        const double a = shapes[i],
                     mean = sqrt(3) * exp(gsl_sf_lngamma(a - 0.5) - gsl_sf_lngamma(a));
        struct prior p = make("inverse_gamma", a, 3, 0, -INFINITY);
        p.on_variance = true;
        CU_ASSERT(near(prior_mean(&p), mean, 1e-9));
        if (a > 1) {
            CU_ASSERT(near(prior_sd(&p), sqrt(3 / (a - 1) - mean * mean), 1e-8));
        } else {
            CU_ASSERT(isnan(prior_sd(&p)));
        }
    }
}

/* far in a tail: of gamma(2, 2) above c, x = c + y with y of density (c + y) exp(-2 y); of the
 * normal above 30, 1 / 30 less a little (Abramowitz & Stegun 26.2.12) */
static void moments_in_a_far_tail(void)
{
    const double c = 200, whole = c / 2 + 0.25, mean = (c / 4 + 0.25) / whole;
    const struct prior gamma = make("gamma", 2, 2, 0, c), normal = make("normal", 0, 1, 0, 30);
    const double z = 30, mills = 1 / z * (1 - 1 / (z * z) + 3 / pow(z, 4) - 15 / pow(z, 6));
    CU_ASSERT(near(prior_mean(&gamma), c + mean, 1e-10));
    CU_ASSERT(near(prior_sd(&gamma), sqrt((c / 4 + 0.375) / whole - mean * mean), 1e-8));
    CU_ASSERT(near(prior_mean(&normal), 1 / mills, 1e-9));
}

static void half_normal_spread(void)
{
    const struct prior p = prior_half_normal(3);
    CU_ASSERT(near(prior_sd(&p), 3 * sqrt(1 - 2 / PI), 1e-15));
    CU_ASSERT(near(prior_mean(&p), 3 * sqrt(2 / PI), 1e-15));
}

/* an exponential prior at 0, where the logarithm is not finite */
static void density_at_zero(void)
{
    const struct prior p = make("gamma", 1, 2, 0, -INFINITY);
    const double zero = 0, log_zero = -INFINITY;
    double out;
    prior_log_density(&p, 1, &zero, &log_zero, &out);
    CU_ASSERT_DOUBLE_EQUAL(out, log(2), 1e-14);
}

/* At shape 1e6: R 4.2.2, qgamma. Student t of 1e6 degrees of freedom: the normal deviate z grows to
 * z + (z^3 + z) / (4 df) (Abramowitz & Stegun 26.7.5). */
static void largest_shape(void)
{
    static const struct {
        double p, lower, upper;
    } gamma[] = {{1e-50, 985140.5742003104, 1015007.428474116},
                 {1e-12, 992981.6691846466, 1007050.653438192},
                 {1e-3, 996912.6173198152, 1003093.082369854},
                 {0.3, 999475.3579172359, 1000524.15874673},
                 {0.9, 1001281.765499621, 998718.6627499802}};
    for (size_t j = 0; j < COUNT_OF(gamma); j++) {
        const double p = gamma[j].p, z = gsl_cdf_ugaussian_Pinv(p);
        CU_ASSERT(near(special_gamma_quantile(1e6, p, false), gamma[j].lower, 2e-14));
        CU_ASSERT(near(special_gamma_quantile(1e6, p, true), gamma[j].upper, 2e-14));
        CU_ASSERT_DOUBLE_EQUAL(special_t_quantile(1e6, p, false), z + (z * z * z + z) / 4e6,
                               1e-12 * (1 + pow(fabs(z), 5)));
    }
}

static const struct unit_test tests[] = {
    {"half a Student t, moments that only just exist", half_student_t},
    {"the sd of an inverse gamma variance", sd_of_an_inverse_gamma_variance},
    {"moments far in a tail", moments_in_a_far_tail},
    {"moments of a half-normal", half_normal_spread},
    {"a gamma of shape 1 at 0", density_at_zero},
    {"the largest shape and degrees of freedom", largest_shape},
    UNIT_END,
};

int main(void)
{
    return unit_main("prior edges", tests);
}
