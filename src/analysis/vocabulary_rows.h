/* SPDX-License-Identifier: GPL-3.0-or-later */
/* vocabulary_rows.h: the one list of target rules and of decision measures. */
#ifndef TERRACE_VOCABULARY_ROWS_H
#define TERRACE_VOCABULARY_ROWS_H

#include "design/vocabulary.h"

extern const struct vocabulary terrace_vocabulary;

#endif
