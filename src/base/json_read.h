/* SPDX-License-Identifier: GPL-3.0-or-later */
/* json_read.h: strict JSON (RFC 8259, I-JSON) on top of cJSON.
 *
 * cJSON accepts more than JSON (1e999, 01, duplicate keys, trailing text, raw tabs, invalid UTF-8,
 * a BOM), so the bytes are checked here first and the tree afterwards. Keys are case-sensitive.
 * Syntax faults carry file and line; faults in the tree carry a JSON pointer.
 */
#ifndef TERRACE_JSON_READ_H
#define TERRACE_JSON_READ_H

#include <cjson/cJSON.h>
#include <stdbool.h>
#include <stddef.h>

#include "base/status.h"
#include "base/text.h"

/* Parses `length` bytes; `file` is only for messages. On STATUS_OK *tree is owned by the caller
 * (cJSON_Delete). Duplicate keys are faults (all of them are reported). Depth at most 64. */
enum status json_parse(const char *bytes, size_t length, const char *file, cJSON **tree,
                       struct err *e);

/* Member of an object by exact name, or NULL. */
const cJSON *json_member(const cJSON *object, const char *key);

/* Appends "/token" to a JSON pointer, with ~ and / escaped (RFC 6901). */
void json_pointer_add(struct text *pointer, const char *token);
void json_pointer_add_index(struct text *pointer, size_t index);

#endif
