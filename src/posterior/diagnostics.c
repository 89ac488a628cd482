/* SPDX-License-Identifier: GPL-3.0-or-later */
/* diagnostics.c: rank-normalised split R-hat, effective sample sizes and quantiles.
 *
 * Vehtari et al. 2021 (see the header); initial monotone sequence of Geyer 1992, Statistical
 * Science 7:473. Check value: AR(1) chains with autocorrelation r have ESS n (1 - r)/(1 + r).
 */
#include "posterior/diagnostics.h"

#include <math.h>
#include <stdbool.h>
#include <stdint.h>
#include <string.h>

#include "base/mem.h"
#include "base/vecmath.h"

/* Values in chain order: `chains` sequences of `length`, each contiguous. */
struct sequences {
    size_t chains, length;
    double *x; /* owned */
};

/* each chain in two halves (an odd last step is left out) */
static struct sequences split_chains(const double *x, size_t n, size_t chains)
{
    const size_t steps = n / chains, half = steps / 2;
    struct sequences s = {2 * chains, half, mem_new(2 * chains * half, sizeof(double))};
    for (size_t c = 0; c < chains; c++)
        for (size_t t = 0; t < 2 * half; t++)
            s.x[(c * 2 + t / half) * half + t % half] = x[t * chains + c];
    return s;
}

static bool is_constant(const double *x, size_t n)
{
    size_t i = 0;
    while (i < n && x[i] == x[0])
        i++;
    return n > 0 && i == n;
}

double diag_mean(const double *x, size_t n)
{
    enum { PIECE = 1024 };
    double total = 0.0;
    if (is_constant(x, n)) /* a rounded mean would give it a spread, and that an ESS */
        return x[0];
    for (size_t first = 0; first < n; first += PIECE) {
        const size_t end = n - first < PIECE ? n : first + PIECE;
        double sum = 0.0;
        for (size_t i = first; i < end; i++)
            sum += x[i];
        total += sum;
    }
    return total / (double)n;
}

double diag_sd(const double *x, size_t n, double mean)
{
    double sum = 0.0;
    for (size_t i = 0; i < n; i++)
        sum += (x[i] - mean) * (x[i] - mean);
    return n > 1 ? sqrt(sum / (double)(n - 1)) : 0.0;
}

/* ---- sorting: least significant digit first on order-preserving keys ---- */

struct keyed {
    uint64_t key;
    uint64_t index;
};

static uint64_t order_key(double x)
{
    uint64_t bits;
    x += 0.0; /* -0 and 0 are one value */
    memcpy(&bits, &x, sizeof bits);
    return bits >> 63 ? ~bits : bits | 0x8000000000000000ULL;
}

static struct keyed *sorted(const double *x, size_t n)
{
    enum { BITS = 11, BINS = 1 << BITS };
    struct keyed *a = mem_new(n, sizeof *a), *b = mem_new(n, sizeof *b);
    for (size_t i = 0; i < n; i++)
        a[i] = (struct keyed){order_key(x[i]), i};
    for (unsigned shift = 0; shift < 64; shift += BITS) {
        size_t count[BINS] = {0}, at = 0;
        for (size_t i = 0; i < n; i++)
            count[a[i].key >> shift & (BINS - 1)]++;
        for (size_t bin = 0; bin < BINS; bin++) {
            const size_t here = count[bin];
            count[bin] = at;
            at += here;
        }
        for (size_t i = 0; i < n; i++)
            b[count[a[i].key >> shift & (BINS - 1)]++] = a[i];
        struct keyed *other = a;
        a = b;
        b = other;
    }
    mem_free(b);
    return a;
}

static double interpolated(const struct keyed *order, const double *x, size_t n, double q)
{
    const double place = q * (double)(n - 1);
    const size_t low = (size_t)place;
    const size_t high = low + 1 < n ? low + 1 : low;
    const double a = x[order[low].index], b = x[order[high].index];
    return a + (place - (double)low) * (b - a);
}

void diag_quantiles(const double *x, size_t n, size_t m, const double *q, double *out)
{
    struct keyed *order = sorted(x, n);
    for (size_t i = 0; i < m; i++)
        out[i] = interpolated(order, x, n, q[i]);
    mem_free(order);
}

/* x[i] -> normal score of its average rank: Phi^-1((rank - 3/8) / (n + 1/4)) (Blom 1958) */
static void normal_scores(double *x, size_t n)
{
    struct keyed *order = sorted(x, n);
    for (size_t first = 0; first < n;) {
        size_t end = first + 1;
        while (end < n && order[end].key == order[first].key)
            end++;
        const double rank = 0.5 * (double)(first + 1 + end);
        const double score = vm_normal_quantile((rank - 0.375) / ((double)n + 0.25));
        for (size_t i = first; i < end; i++)
            x[order[i].index] = score;
        first = end;
    }
    mem_free(order);
}

/* ---- effective sample size ---- */

/* Chains that are still correlated at this lag have an ESS far below any that is accepted; going on
 * would only cost time. */
enum { LAGS_MOST = 8192 };

struct chain_moments {
    double *mean, *variance; /* per chain; variance with length - 1 */
    double within, pooled;   /* W, and var+ of the estimate */
};

static struct chain_moments moments_of(const struct sequences *s)
{
    struct chain_moments m = {mem_new(s->chains, sizeof(double)),
                              mem_new(s->chains, sizeof(double)), 0.0, 0.0};
    const double n = (double)s->length;
    for (size_t c = 0; c < s->chains; c++) {
        const double *x = s->x + c * s->length;
        m.mean[c] = diag_mean(x, s->length);
        const double sd = diag_sd(x, s->length, m.mean[c]);
        m.variance[c] = sd * sd;
        m.within += m.variance[c] / (double)s->chains;
    }
    const double between = diag_sd(m.mean, s->chains, diag_mean(m.mean, s->chains));
    m.pooled = m.within * (n - 1.0) / n + between * between;
    return m;
}

static void moments_release(struct chain_moments *m)
{
    mem_free(m->mean);
    mem_free(m->variance);
}

/* mean over chains of the autocovariance at a lag (divided by the length) */
static double autocovariance(const struct sequences *s, const struct chain_moments *m, size_t lag)
{
    double total = 0.0;
    for (size_t c = 0; c < s->chains; c++) {
        const double *x = s->x + c * s->length;
        double sum = 0.0;
        for (size_t t = lag; t < s->length; t++)
            sum += (x[t] - m->mean[c]) * (x[t - lag] - m->mean[c]);
        total += sum / (double)s->length;
    }
    return total / (double)s->chains;
}

static double correlation(const struct sequences *s, const struct chain_moments *m, size_t lag)
{
    const double n = (double)s->length;
    return 1.0 - (m->within - autocovariance(s, m, lag) * n / (n - 1.0)) / m->pooled;
}

static double ess_of(const struct sequences *s)
{
    const double total = (double)(s->chains * s->length);
    struct chain_moments m = moments_of(s);
    double ess = total;
    if (m.pooled > 0.0 && s->length > 3) {
        double sum = 0.0, last = INFINITY, odd = 0.0;
        for (size_t lag = 0; lag + 3 < s->length && lag < LAGS_MOST; lag += 2) {
            const double even = lag == 0 ? 1.0 : correlation(s, &m, lag);
            odd = correlation(s, &m, lag + 1);
            double pair = even + odd;
            if (pair < 0.0) {
                sum += even > 0.0 ? 0.5 * even : 0.0; /* the last even term counts once */
                break;
            }
            pair = pair < last ? pair : last;
            sum += pair;
            last = pair;
        }
        const double tau = 2.0 * sum - 1.0;
        const double log10_total = vm_log(total) / 2.302585092994046;
        ess = tau > 1.0 / log10_total ? total / tau : total * log10_total;
    }
    moments_release(&m);
    return ess;
}

double diag_ess(const double *x, size_t n, size_t chains)
{
    if (chains == 1 || is_constant(x, n))
        return (double)n;
    struct sequences s = split_chains(x, n, chains);
    const double ess = ess_of(&s);
    mem_free(s.x);
    return ess;
}

double diag_ess_bulk(const double *x, size_t n, size_t chains)
{
    if (chains == 1 || is_constant(x, n))
        return (double)n;
    struct sequences s = split_chains(x, n, chains);
    normal_scores(s.x, s.chains * s.length);
    const double ess = ess_of(&s);
    mem_free(s.x);
    return ess;
}

double diag_ess_tail(const double *x, size_t n, size_t chains)
{
    static const double q[2] = {0.05, 0.95};
    double at[2], least = INFINITY;
    if (chains == 1)
        return (double)n;
    diag_quantiles(x, n, 2, q, at);
    double *indicator = mem_new(n, sizeof *indicator);
    for (int side = 0; side < 2; side++) {
        for (size_t i = 0; i < n; i++)
            indicator[i] = x[i] <= at[side] ? 1.0 : 0.0;
        const double ess = diag_ess(indicator, n, chains);
        least = ess < least ? ess : least;
    }
    mem_free(indicator);
    return least;
}

/* Chains that each stay put at places of their own have no spread within: a number beyond every
 * threshold stands for infinity, which JSON cannot say. */
static double rhat_of(const struct sequences *s)
{
    static const double most = 0x1p52;
    struct chain_moments m = moments_of(s);
    double rhat = NAN;
    if (m.pooled > 0.0)
        rhat = m.within > m.pooled / (most * most) ? sqrt(m.pooled / m.within) : most;
    moments_release(&m);
    return rhat;
}

double diag_rhat(const double *x, size_t n, size_t chains)
{
    static const double middle = 0.5;
    if (chains == 1 || n / chains < 4)
        return NAN;
    struct sequences s = split_chains(x, n, chains), folded = split_chains(x, n, chains);
    const size_t total = s.chains * s.length;
    double median;
    diag_quantiles(s.x, total, 1, &middle, &median);
    for (size_t i = 0; i < total; i++)
        folded.x[i] = s.x[i] < median ? median - s.x[i] : s.x[i] - median;
    normal_scores(s.x, total);
    normal_scores(folded.x, total);
    const double bulk = rhat_of(&s), tail = rhat_of(&folded);
    mem_free(s.x);
    mem_free(folded.x);
    return tail > bulk ? tail : bulk;
}

double diag_mcse_mean(const double *x, size_t n, size_t chains)
{
    return diag_sd(x, n, diag_mean(x, n)) / sqrt(diag_ess(x, n, chains));
}

double diag_mcse_probability(double p, double ess)
{
    const double q = (p * ess + 1.0) / (ess + 2.0);
    return sqrt(q * (1.0 - q) / (ess + 2.0));
}
