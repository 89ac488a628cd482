/* SPDX-License-Identifier: GPL-3.0-or-later */
/* binomial.c: binomial draws: inversion where few events are expected, else transformed rejection
 * with a squeeze (algorithm BTRS).
 *
 * Hörmann (1993), The generation of binomial random variates, Journal of Statistical Computation
 * and Simulation 46:101.
 */
#include "analysis/binomial.h"

#include <math.h>
#include <stdbool.h>

#include "base/vecmath.h"

/* Expected events below which inversion is used. */
static const double FEW = 10;

/* Inversion from 0 on; p <= 1/2 and n p < FEW, so that (1 - p)^n is no less than 1e-7. */
static double by_inversion(struct rng_serial *r, double n, double p)
{
    const double odds = p / (1 - p);
    double u = rng_serial_uniform(r), mass = vm_exp(n * vm_log(1 - p)), k = 0;
    while (u > mass && k < n) {
        u -= mass;
        k += 1;
        mass *= odds * (n - k + 1) / k;
    }
    return k;
}

/* ln k! - (ln sqrt(2 pi) + (k + 1/2) ln(k + 1) - (k + 1)): Stirling's correction at k + 1. Below
 * 10 by subtraction of sums of logarithms; 0! gives 1 - ln sqrt(2 pi) = 0.0810614668. */
static double stirling(double k)
{
    static const double ln_root_two_pi = 0.91893853320467274178;
    const double x = k + 1;
    if (k < 10) {
        double factorial = 1;
        for (double i = 2; i <= k; i += 1)
            factorial *= i;
        return vm_log(factorial) - ln_root_two_pi - (k + 0.5) * vm_log(x) + x;
    }
    const double square = x * x;
    return (1.0 / 12 - (1.0 / 360 - 1.0 / 1260 / square) / square) / x;
}

/* What the rejection needs of n and p. */
struct hat {
    double n, odds, a, b, c, alpha, squeeze, mode, at_mode;
};

static struct hat hat_of(double n, double p)
{
    const double root = sqrt(n * p * (1 - p)), b = 1.15 + 2.53 * root;
    struct hat h = {.n = n, .odds = p / (1 - p), .b = b};
    h.a = -0.0873 + 0.0248 * b + 0.01 * p;
    h.c = n * p + 0.5;
    h.alpha = (2.83 + 5.1 / b) * root;
    h.squeeze = 0.92 - 4.2 / b;
    h.mode = floor((n + 1) * p);
    h.at_mode = (h.mode + 0.5) * vm_log((h.mode + 1) / (h.odds * (n - h.mode + 1))) +
                stirling(h.mode) + stirling(n - h.mode);
    return h;
}

/* ln of the probability of k over that of the mode. */
static double log_ratio(const struct hat *h, double k)
{
    const double n = h->n, m = h->mode;
    return h->at_mode + (n + 1) * vm_log((n - m + 1) / (n - k + 1)) +
           (k + 0.5) * vm_log(h->odds * (n - k + 1) / (k + 1)) - stirling(k) - stirling(n - k);
}

static double by_rejection(struct rng_serial *r, double n, double p)
{
    const struct hat h = hat_of(n, p);
    for (;;) {
        const double u = rng_serial_uniform(r) - 0.5;
        const double v = rng_serial_uniform(r);
        const double edge = 0.5 - fabs(u);
        const double k = floor((2 * h.a / edge + h.b) * u + h.c);
        if (edge >= 0.07 && v <= h.squeeze)
            return k;
        if (!(k >= 0 && k <= n))
            continue;
        if (vm_log(v * h.alpha / (h.a / (edge * edge) + h.b)) <= log_ratio(&h, k))
            return k;
    }
}

double binomial_draw(struct rng_serial *r, double n, double p)
{
    const bool mirrored = p > 0.5;
    const double small = mirrored ? 1 - p : p;
    if (!(n > 0) || !(small > 0))
        return mirrored ? n : 0;
    const double k = n * small < FEW ? by_inversion(r, n, small) : by_rejection(r, n, small);
    return mirrored ? n - k : k;
}
