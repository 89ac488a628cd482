/* SPDX-License-Identifier: GPL-3.0-or-later */
/* schema.h: the JSON Schema (2020-12) of the design file, read off the field table.
 *
 * design_schema() in design.h is the door; schema_of serves any row (tests use it).
 */
#ifndef TERRACE_SCHEMA_H
#define TERRACE_SCHEMA_H

#include "base/text.h"
#include "design/fields.h"

void schema_of(struct text *out, const struct field *row, const struct vocabulary *v);

#endif
