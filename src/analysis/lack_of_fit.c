/* SPDX-License-Identifier: GPL-3.0-or-later */
/* lack_of_fit.c: the posterior predictive probability of the discrepancy between levels. */
#include "analysis/lack_of_fit.h"

#include <math.h>

#include "analysis/binomial.h"
#include "base/vecmath.h"

/* Draws for which data are repeated; they are spread evenly over all. */
enum { REPEATED_MOST = 2000 };

/* Abramowitz & Stegun (1964), Handbook of Mathematical Functions, 26.4.4 (odd df) and 26.4.5 (even
 * df): with c = sqrt(x) and Z the standard normal density,
 *   odd:  2 Q(c) + 2 Z(c) sum_{r = 1}^{(df - 1)/2} c^(2r - 1) / (1 3 5 ... (2r - 1))
 *   even: exp(-x/2) (1 + sum_{r = 1}^{(df - 2)/2} x^r / (2 4 ... 2r))
 * The density is a factor of the first term, so that no term overflows before it.
 * Check value: chi_square_tail(11.0705, 5) = 0.05. */
double chi_square_tail(double x, size_t df)
{
    static const double root_two_over_pi = 0.79788456080286535588;
    const double c = sqrt(x), decay = vm_exp(-x / 2);
    double sum, term;
    size_t divisor;
    if (!(decay > 0))
        return 0; /* below 1e-300 */
    if (df % 2 == 0) {
        sum = term = decay;
        divisor = 2;
    } else {
        sum = 2 * vm_normal_cdf(-c);
        term = root_two_over_pi * decay * c;
        sum += df > 1 ? term : 0;
        divisor = 3;
    }
    for (; divisor < df; divisor += 2) {
        term *= x / (double)divisor;
        sum += term;
    }
    return sum < 1 ? sum : 1;
}

static size_t levels_with_outcomes(const struct level_data *data)
{
    size_t count = 0;
    for (size_t k = 0; k < data->levels; k++)
        count += data->n[k] > 0;
    return count;
}

/* ---- continuous: given a draw the repeated discrepancy is chi-square ---- */

/* The row of the residual sd, NULL without one. */
static const double *residual_row(const struct design *d, const struct draws *draws)
{
    for (size_t i = 0; i < d->model.parameters; i++)
        if (d->model.parameter[i]->role == ROLE_RESIDUAL)
            return draws->parameter + i * draws->stride;
    return NULL;
}

static double normal_discrepancy(const struct level_data *data, const struct draws *draws, size_t i,
                                 double sd)
{
    double sum = 0;
    for (size_t k = 0; k < data->levels; k++) {
        const double apart = (data->mean[k] - draws->response[k * draws->stride + i]) / sd;
        if (data->n[k] > 0)
            sum += data->n[k] * (apart * apart);
    }
    return sum;
}

static double normal_p(const struct design *d, const struct level_data *data,
                       const struct draws *draws)
{
    const size_t df = levels_with_outcomes(data);
    const double *sd = residual_row(d, draws);
    double sum = 0;
    for (size_t i = 0; i < draws->n && sd; i++)
        sum += chi_square_tail(normal_discrepancy(data, draws, i, sd[i]), df);
    return sd ? sum / (double)draws->n : NAN;
}

/* ---- binary: the data are repeated at the draw's rates ---- */

/* (events - n p)^2 / (n p (1 - p)); a rate that is 0 or 1 to the last digit allows one outcome. */
static double rate_term(double n, double events, double p)
{
    const double apart = events - n * p, variance = n * p * (1 - p);
    if (variance > 0)
        return apart * apart / variance;
    return fabs(apart) > 0 ? INFINITY : 0;
}

static void rate_discrepancies(const struct level_data *data, const struct draws *draws, size_t i,
                               struct rng_serial *r, double *observed, double *repeated)
{
    *observed = *repeated = 0;
    for (size_t k = 0; k < data->levels; k++) {
        const double n = data->n[k], p = draws->response[k * draws->stride + i];
        if (!(n > 0))
            continue;
        *observed += rate_term(n, data->events[k], p);
        *repeated += rate_term(n, binomial_draw(r, n, p), p);
    }
}

static double rates_p(const struct level_data *data, const struct draws *draws, struct rng_key key)
{
    const size_t count = draws->n < REPEATED_MOST ? draws->n : REPEATED_MOST;
    struct rng_serial r;
    size_t reached = 0;
    key.purpose = RNG_REPEATED;
    rng_serial_init(&r, &key);
    for (size_t j = 0; j < count; j++) {
        double observed, repeated;
        rate_discrepancies(data, draws, j * draws->n / count, &r, &observed, &repeated);
        reached += repeated >= observed;
    }
    return (double)reached / (double)count;
}

double lack_of_fit_p(const struct design *d, const struct level_data *data,
                     const struct draws *draws, struct rng_key key)
{
    if (levels_with_outcomes(data) < 2)
        return NAN;
    return d->type == ENDPOINT_BINARY ? rates_p(data, draws, key) : normal_p(d, data, draws);
}
