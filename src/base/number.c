/* SPDX-License-Identifier: GPL-3.0-or-later */
/* number.c: the one door for numbers, out and in.
 *
 * printf's %e and strtod are correctly rounded in the C library, so digits do not depend on it.
 */
#include "base/number.h"

#include <float.h>
#include <math.h>
#include <stdint.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

#include "base/base.h"

#define MAX_WHOLE 9007199254740992.0 /* 2^53: every whole number up to here is a double */
#define NO_NUMBER "\xE2\x80\x93"     /* en dash */
#define INFINITE "\xE2\x88\x9E"

/* A positive number as 0.d1d2d3... x 10^point, without trailing zeros. */
struct decimal {
    char digits[20];
    int count, point;
};

static void decimal_set(struct decimal *d, double x, int count)
{
    char written[NUMBER_CHARS];

    snprintf(written, sizeof written, "%.*e", count - 1, x);
    d->digits[0] = written[0];
    if (count > 1)
        memcpy(d->digits + 1, written + 2, (size_t)count - 1);
    d->digits[count] = '\0';
    d->count = count;
    d->point = (int)strtol(strchr(written, 'e') + 1, NULL, 10) + 1;
}

static double decimal_value(const struct decimal *d)
{
    char written[NUMBER_CHARS];

    snprintf(written, sizeof written, "0.%se%d", d->digits, d->point);
    return strtod(written, NULL);
}

/* The next decimal of the same length above. */
static void decimal_step_up(struct decimal *d)
{
    int i = d->count - 1;

    while (i >= 0 && d->digits[i] == '9')
        d->digits[i--] = '0';
    if (i >= 0) {
        d->digits[i]++;
    } else {
        d->digits[0] = '1';
        d->point++;
    }
}

static void decimal_trim(struct decimal *d)
{
    while (d->count > 1 && d->digits[d->count - 1] == '0')
        d->digits[--d->count] = '\0';
}

static bool is_power_of_two(double x)
{
    uint64_t bits;

    memcpy(&bits, &x, sizeof bits);
    return (bits & ((UINT64_C(1) << 52) - 1)) == 0;
}

/* The fewest digits that read back as x > 0, the closest to x among them. A decimal of up to
 * DBL_DIG = 15 digits survives the way to a normal double and back, so 15 digits decide for all
 * shorter lengths at once. At a power of two the doubles above lie twice as far apart as those
 * below: there the closest 16 digits may fail while their upper neighbour reads back (2^-44). */
static void decimal_shortest(struct decimal *d, double x)
{
    int count = x < DBL_MIN ? 1 : DBL_DIG;

    for (; count < DBL_DECIMAL_DIG; count++) {
        decimal_set(d, x, count);
        if (decimal_value(d) == x)
            break;
        if (!is_power_of_two(x))
            continue;
        decimal_step_up(d);
        if (decimal_value(d) == x)
            break;
    }
    if (count == DBL_DECIMAL_DIG)
        decimal_set(d, x, count);
    decimal_trim(d);
}

static char *put_n(char *at, const char *s, int n)
{
    memcpy(at, s, (size_t)n);
    return at + n;
}

static char *put_zeros(char *at, int n)
{
    memset(at, '0', (size_t)(n > 0 ? n : 0));
    return at + (n > 0 ? n : 0);
}

/* d without exponent; at most 21 places before the point and 24 after it. */
static void put_plain(char *at, const struct decimal *d)
{
    if (d->point <= 0) {
        at = put_n(at, "0.", 2);
        at = put_zeros(at, -d->point);
        at = put_n(at, d->digits, d->count);
    } else if (d->count <= d->point) {
        at = put_n(at, d->digits, d->count);
        at = put_zeros(at, d->point - d->count);
    } else {
        at = put_n(at, d->digits, d->point);
        *at++ = '.';
        at = put_n(at, d->digits + d->point, d->count - d->point);
    }
    *at = '\0';
}

static void put_exponent(char *at, const struct decimal *d)
{
    *at++ = d->digits[0];
    if (d->count > 1) {
        *at++ = '.';
        at = put_n(at, d->digits + 1, d->count - 1);
    }
    snprintf(at, 16, "e%+d", d->point - 1);
}

/* ECMAScript's Number::toString (ECMA-262, 6.1.6.1.20), which RFC 8785 (3.2.2.3) adopts: plain for
 * 1e-6 <= |x| < 1e21, else with exponent. Check values: RFC 8785, appendix B. */
const char *number_shortest(char out[NUMBER_CHARS], double x)
{
    struct decimal d;
    char *at = out;

    if (!isfinite(x))
        BUG("number_shortest: not a finite number");
    if (x == 0) {
        memcpy(out, "0", 2);
        return out;
    }
    if (x < 0)
        *at++ = '-';
    x = fabs(x);
    if (x < MAX_WHOLE && x == (double)(uint64_t)x) {
        snprintf(at, 24, "%.0f", x); /* short cut: whole numbers this small are their own digits */
        return out;
    }
    decimal_shortest(&d, x);
    if (d.point > -6 && d.point <= 21)
        put_plain(at, &d);
    else
        put_exponent(at, &d);
    return out;
}

static const char *not_finite(char out[NUMBER_CHARS], double x)
{
    snprintf(out, NUMBER_CHARS, "%s", isnan(x) ? NO_NUMBER : x < 0 ? "-" INFINITE : INFINITE);
    return out;
}

/* "-0.00" says less than "0.00". */
static const char *drop_minus_of_zero(char *out)
{
    if (out[0] == '-' && strspn(out + 1, "0.") == strlen(out + 1))
        memmove(out, out + 1, strlen(out));
    return out;
}

const char *number_fixed(char out[NUMBER_CHARS], double x, int decimals)
{
    if (decimals < 0 || decimals > 15)
        BUG("number_fixed: 0 to 15 decimals");
    if (!isfinite(x))
        return not_finite(out, x);
    if (fabs(x) >= 1e15)
        return number_significant(out, x, 15); /* beyond the precision of a double anyway */
    snprintf(out, NUMBER_CHARS, "%.*f", decimals, x);
    return drop_minus_of_zero(out);
}

const char *number_significant(char out[NUMBER_CHARS], double x, int digits)
{
    struct decimal d;
    char *at = out;

    if (digits < 1 || digits > 15)
        BUG("number_significant: 1 to 15 digits");
    if (!isfinite(x))
        return not_finite(out, x);
    if (x == 0) {
        memcpy(out, "0", 2);
        return out;
    }
    if (x < 0)
        *at++ = '-';
    x = fabs(x);
    decimal_set(&d, x, digits);
    if (x >= 1e-4 && x < 1e7)
        put_plain(at, &d);
    else
        put_exponent(at, &d);
    return out;
}

double number_nine(double x)
{
    char written[NUMBER_CHARS];

    if (!isfinite(x) || x == 0)
        return x;
    snprintf(written, sizeof written, "%.8e", x);
    return strtod(written, NULL);
}

int number_decimals_for(double error, int fallback)
{
    struct decimal d;

    if (!(error > 0) || isinf(error))
        return fallback;
    decimal_set(&d, error, DBL_DECIMAL_DIG);
    if (d.point > 0)
        return 0;
    return 1 - d.point > 6 ? 6 : 1 - d.point;
}

static const char *skip_blanks(const char *s)
{
    return s + strspn(s, " \t");
}

static const char *skip_digits(const char *s)
{
    return s + strspn(s, "0123456789");
}

/* The end of the number at s, or NULL: strtod alone would also take "0x1p3", "inf" and "nan". */
static const char *number_end(const char *s)
{
    const char *whole, *end;

    if (*s == '+' || *s == '-')
        s++;
    whole = skip_digits(s);
    end = *whole == '.' ? skip_digits(whole + 1) : whole;
    if (whole == s && end <= whole + 1)
        return NULL; /* no digit on either side of the point */
    if (*end == 'e' || *end == 'E') {
        const char *power = end + 1 + (end[1] == '+' || end[1] == '-');

        end = skip_digits(power);
        if (end == power)
            return NULL;
    }
    return end;
}

bool number_parse(const char *s, double *out)
{
    const char *start = skip_blanks(s), *end = number_end(start);
    double x;

    if (end == NULL || *skip_blanks(end) != '\0')
        return false;
    x = strtod(start, NULL);
    if (!isfinite(x))
        return false;
    *out = x;
    return true;
}

bool number_parse_whole(const char *s, double low, double high, double *out)
{
    bool negative = *s == '-';
    const char *digits = s + (*s == '-' || *s == '+');
    uint64_t whole = 0;
    double x;

    if (*digits == '\0' || *skip_digits(digits) != '\0')
        return false;
    for (; *digits != '\0'; digits++) {
        whole = 10 * whole + (uint64_t)(*digits - '0');
        if (whole > (uint64_t)MAX_WHOLE)
            return false; /* it would be rounded silently */
    }
    x = negative && whole != 0 ? -(double)whole : (double)whole;
    if (x < low || x > high)
        return false;
    *out = x;
    return true;
}
