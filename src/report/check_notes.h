/* SPDX-License-Identifier: GPL-3.0-or-later */
/* check_notes.h: what a reader of a design should be told: warnings, remarks, reminders. */
#ifndef TERRACE_CHECK_NOTES_H
#define TERRACE_CHECK_NOTES_H

#include "report/check_report.h"

/* bands may be NULL. */
void check_notes_init(struct check_notes *out, const struct design *d, const struct expected *x,
                      const struct prior_bands *bands);
void check_notes_release(struct check_notes *n);

#endif
