/* SPDX-License-Identifier: GPL-3.0-or-later */
/* number.h: the one door for numbers, out and in. The program never calls setlocale. */
#ifndef TERRACE_NUMBER_H
#define TERRACE_NUMBER_H

#include <stdbool.h>
#include <stddef.h>

enum { NUMBER_CHARS = 40 };

/* Shortest decimal that reads back equal, in the form of RFC 8785 (ECMAScript Number to string);
 * -0 gives "0". `x` must be finite: anything else is a BUG. Returns out. */
const char *number_shortest(char out[NUMBER_CHARS], double x);

/* For people: `decimals` digits after the point (0 to 15), never "-0.00"; NaN gives "–". */
const char *number_fixed(char out[NUMBER_CHARS], double x, int decimals);

/* For people: `digits` significant digits (1 to 15), no exponent for 1e-4 <= |x| < 1e7. */
const char *number_significant(char out[NUMBER_CHARS], double x, int digits);

/* x rounded to 9 significant digits (results of GSL and NLopt), as a double. */
double number_nine(double x);

/* Decimals that a figure with Monte Carlo (or standard) error `error` deserves: the digit of the
 * error's first significant place, 0 to 6; `fallback` when error is 0 or NaN. */
int number_decimals_for(double error, int fallback);

/* Strict decimal number ([+-]digits[.digits][e[+-]digits], '.5' and '5.' allowed) filling the
 * whole string; blanks around it are skipped. False when it is not one or is not finite. */
bool number_parse(const char *s, double *out);

/* Whole number in [low, high]; digits only, an optional sign. */
bool number_parse_whole(const char *s, double low, double high, double *out);

#endif
