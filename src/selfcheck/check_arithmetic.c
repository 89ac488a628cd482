/* SPDX-License-Identifier: GPL-3.0-or-later */
/* check_arithmetic.c: random bits, digests and special functions against published values. */
#include <math.h>
#include <stdio.h>
#include <string.h>

#include "base/base.h"
#include "base/rng.h"
#include "base/sha256.h"
#include "base/vecmath.h"
#include "design/special.h"
#include "selfcheck/check_list.h"

/* ---- Philox ---- */

enum { WORDS = 40 };

static void hex_words(char out[WORDS], const uint32_t x[4])
{
    snprintf(out, WORDS, "%08x %08x %08x %08x", x[0], x[1], x[2], x[3]);
}

static void run_philox(struct check_result *r, double nudge)
{
    static const struct {
        uint32_t counter[4], key[2], bits[4];
    } known[] = {
        {{0, 0, 0, 0}, {0, 0}, {0x6627e8d5, 0xe169c58d, 0xbc57ac4c, 0x9b00dbd8}},
        {{0xffffffff, 0xffffffff, 0xffffffff, 0xffffffff},
         {0xffffffff, 0xffffffff},
         {0x408f276d, 0x41c83b0e, 0xa20bc7c6, 0x6d5451fd}},
        {{0x243f6a88, 0x85a308d3, 0x13198a2e, 0x03707344},
         {0xa4093822, 0x299f31d0},
         {0xd16cfe09, 0x94fdcceb, 0x5001e420, 0x24126ea1}},
    };
    for (size_t i = 0; i < COUNT_OF(known); i++) {
        uint32_t out[4], counter[4];
        memcpy(counter, known[i].counter, sizeof counter);
        counter[0] ^= nudge != 0 ? 1u : 0u;
        philox4x32(out, counter, known[i].key);
        char want[WORDS], got[WORDS], what[WORDS];
        hex_words(want, known[i].bits);
        hex_words(got, out);
        snprintf(what, sizeof what, "vector %zu", i + 1);
        check_add_text(r, want, got, what);
    }
}

const struct check check_philox = {
    "philox",
    "Arithmetic",
    "Salmon, Moraes, Dror & Shaw 2011, Parallel random numbers: as easy as 1, 2, 3, SC'11: known "
    "answers of Philox4x32-10 (from memory)",
    "Random bits for three counters and keys; exact.",
    run_philox,
    false};

/* ---- SHA-256 ---- */

static void run_sha256(struct check_result *r, double nudge)
{
    char digest[SHA256_HEX];
    const char *const word = nudge != 0 ? "abd" : "abc";
    sha256_hex(digest, word, 3);
    check_add_text(r, "ba7816bf8f01cfea414140de5dae2223b00361a396177a9cb410ff61f20015ad", digest,
                   "digest of abc");
    sha256_hex(digest, "", 0);
    check_add_text(r, "e3b0c44298fc1c149afbf4c8996fb92427ae41e4649b934ca495991b7852b855", digest,
                   "digest of the empty message");
}

const struct check check_sha256 = {
    "sha256",
    "Arithmetic",
    "NIST FIPS 180-4, Secure Hash Standard: example of the message abc, and of the empty message "
    "(from memory)",
    "Digests that name designs and data in results; exact.",
    run_sha256,
    false};

/* ---- exp, log, logistic, normal ---- */

enum function { EXP, LOG, LOGISTIC, CDF, QUANTILE };

static const struct {
    const char *name;
    enum function f;
    double x, value, allowed;
} tabulated[] = {
    {"exp(1)", EXP, 1, 2.718281828459045, 1e-15},
    {"exp(-1)", EXP, -1, 0.367879441171442, 1e-15},
    {"exp(10)", EXP, 10, 22026.46579480672, 1e-10},
    {"ln 2", LOG, 2, 0.693147180559945, 1e-15},
    {"ln 10", LOG, 10, 2.302585092994046, 1e-15},
    {"ln 1.05", LOG, 1.05, 0.048790164169432, 1e-15},
    {"1 / (1 + exp(-1))", LOGISTIC, 1, 0.731058578630005, 1e-15},
    {"P(0.5)", CDF, 0.5, 0.691462461274013, 1e-15},
    {"P(1)", CDF, 1, 0.841344746068543, 1e-15},
    {"P(2)", CDF, 2, 0.977249868051821, 1e-15},
    {"P(3)", CDF, 3, 0.998650101968370, 1e-15},
    {"x with P(x) = 0.975", QUANTILE, 0.975, 1.959963984540054, 2e-15},
    {"x with P(x) = 0.9", QUANTILE, 0.9, 1.281551565544600, 2e-15},
};

static double scalar_value(enum function f, double x)
{
    switch (f) {
    case EXP:
        return vm_exp(x);
    case LOG:
        return vm_log(x);
    case LOGISTIC:
        return vm_logistic(x);
    case CDF:
        return vm_normal_cdf(x);
    default:
        return vm_normal_quantile(x);
    }
}

static double lane_value(const struct vecmath *m, enum function f, double x)
{
    void (*const block[])(size_t, const double *, double *) = {m->exp, m->log, m->logistic,
                                                               m->normal_cdf};
    double in[5] = {0.25, 0.5, x, 0.75, 1}, out[5]; /* an odd count: lanes and the rest */
    block[f](5, in, out);
    return out[2];
}

static void run_vecmath(struct check_result *r, double nudge)
{
    const struct vecmath *const sets[] = {&vecmath_sse2,
                                          vecmath() == &vecmath_sse2 ? NULL : vecmath()};
    for (size_t i = 0; i < COUNT_OF(tabulated); i++) {
        const double x = tabulated[i].x + nudge, want = tabulated[i].value;
        const enum function f = tabulated[i].f;
        check_add(r, want, scalar_value(f, x), tabulated[i].allowed, "%s", tabulated[i].name);
        for (size_t s = 0; s < COUNT_OF(sets) && f != QUANTILE; s++)
            if (sets[s])
                check_add(r, want, lane_value(sets[s], f, x), tabulated[i].allowed, "%s, %s lanes",
                          tabulated[i].name, sets[s]->name);
    }
}

const struct check check_vecmath = {
    "vecmath",
    "Arithmetic",
    "Abramowitz & Stegun 1964, Handbook of Mathematical Functions, tables 4.2 (ln), 4.4 (exp), "
    "26.1 "
    "(normal P) and 26.5 (its inverse) (from memory; digits beyond the tables by the series 4.2.1, "
    "4.1.24 and 7.1.5)",
    "Our own functions, one value at a time and on lanes; 15 digits.",
    run_vecmath,
    false};

/* ---- gamma and t ---- */

static void run_gamma(struct check_result *r, double nudge)
{
    static const struct {
        double df, q, x;
    } chi[] = {{1, 0.05, 3.84146},  {2, 0.05, 5.99146},   {5, 0.05, 11.0705},  {10, 0.05, 18.3070},
               {30, 0.05, 43.7729}, {10, 0.001, 29.5883}, {5, 0.975, 0.831211}};
    check_add(r, 0.8862269255, exp(special_log_gamma(1.5 + nudge)), 5e-11, "Gamma(1.5)");
    check_add(r, 0.9064024771, exp(special_log_gamma(1.25 + nudge)), 5e-11, "Gamma(1.25)");
    for (size_t i = 0; i < COUNT_OF(chi); i++)
        check_add(
            r, chi[i].x, 2 * special_gamma_quantile(chi[i].df / 2, chi[i].q + nudge * 1e-3, true),
            2 * check_digits(chi[i].x, 6), "chi-square, %g df, upper %g", chi[i].df, chi[i].q);
}

const struct check check_gamma = {
    "gamma",
    "Arithmetic",
    "Abramowitz & Stegun 1964, tables 6.1 (gamma function) and 26.8 (percentage points of "
    "chi-square) (from memory)",
    "The functions behind gamma and inverse gamma priors; one unit of the last digit of the "
    "tables.",
    run_gamma,
    false};

static void run_student(struct check_result *r, double nudge)
{
    static const struct {
        double df, two_sided, t;
    } known[] = {{1, 0.95, 12.706}, {2, 0.95, 4.303},  {5, 0.95, 2.571},
                 {10, 0.95, 2.228}, {30, 0.99, 2.750}, {120, 0.95, 1.980}};
    for (size_t i = 0; i < COUNT_OF(known); i++)
        check_add(r, known[i].t,
                  special_t_quantile(known[i].df + nudge, 0.5 * (1 - known[i].two_sided), true),
                  5.1e-4, "t, %g df, two-sided %g", known[i].df, known[i].two_sided);
}

const struct check check_student = {
    "student_t",
    "Arithmetic",
    "Abramowitz & Stegun 1964, table 26.10 (percentage points of t) (from memory)",
    "The functions behind Student t priors; three decimals, as the table.",
    run_student,
    false};
