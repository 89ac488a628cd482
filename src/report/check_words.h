/* SPDX-License-Identifier: GPL-3.0-or-later */
/* check_words.h: pieces of a design as sentences; each appends to `out`, no line end. */
#ifndef TERRACE_CHECK_WORDS_H
#define TERRACE_CHECK_WORDS_H

#include "analysis/row_words.h"
#include "base/text.h"
#include "design/design.h"

void say_value(struct text *out, double x, const char *unit);      /* "20 mg" */
void say_time(struct text *out, const struct design *d, double x); /* "2 weeks" */
void say_prior(struct text *out, const struct prior *p);
void say_endpoint(struct text *out, const struct design *d);
void say_reference(struct text *out, const struct design *d);
void say_curve(struct text *out, const struct design *d);
void say_target(struct text *out, const struct design *d, const struct target *t);
/* "the probability … exceeds 0.99, and …" */
void say_conditions(struct text *out, const struct design *d, const struct conditions *c);
void say_decision(struct text *out, const struct design *d, const struct decision *x);
void say_final(struct text *out, const struct design *d);
void say_start(struct text *out, const struct design *d); /* fixed-ratio allocation */
void say_adapt(struct text *out, const struct design *d); /* adapted shares, or that none are */
void say_analyses(struct text *out, const struct design *d);
void say_accrual(struct text *out, const struct design *d);
void say_dropout(struct text *out, const struct design *d);
void say_point(struct text *out, const struct design *d, double point); /* "120 observed" */

#endif
