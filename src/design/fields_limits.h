/* SPDX-License-Identifier: GPL-3.0-or-later */
/* fields_limits.h: bounds that keep arithmetic finite where the interface names none. */
#ifndef TERRACE_FIELDS_LIMITS_H
#define TERRACE_FIELDS_LIMITS_H

#define NUMBER_LIMIT 1e100            /* any number of a design */
#define COUNT_LIMIT 1e9               /* subjects, trials, whole counts */
#define SEED_LIMIT 9007199254740991.0 /* 2^53 - 1 */

enum { POINTS_MAX = 10000 }; /* planned analyses of one trial */

#endif
