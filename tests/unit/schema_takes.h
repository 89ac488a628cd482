/* SPDX-License-Identifier: GPL-3.0-or-later */
/* schema_takes.h: a small validator of the JSON Schema keywords that schema.c writes. */
#ifndef TERRACE_TEST_SCHEMA_TAKES_H
#define TERRACE_TEST_SCHEMA_TAKES_H

#include <cjson/cJSON.h>
#include <stdbool.h>

/* Whether `item` obeys `schema`. A keyword the validator does not know fails the running test. */
bool schema_takes(const cJSON *schema, const cJSON *item);

#endif
