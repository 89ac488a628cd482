/* SPDX-License-Identifier: GPL-3.0-or-later */
/* json_write.h: the only way JSON leaves the program.
 *
 * Two-space indentation, members in the order written; an array or object opened with
 * json_open_inline stays on one line. A NaN or infinity given to json_number is a BUG; json_maybe
 * writes null for NaN ("a number that does not exist is null").
 */
#ifndef TERRACE_JSON_WRITE_H
#define TERRACE_JSON_WRITE_H

#include <cjson/cJSON.h>
#include <stdbool.h>
#include <stddef.h>

#include "base/text.h"

struct json_writer {
    struct text *out; /* borrowed */
    int depth;
    unsigned char state[64]; /* per depth: object or list, empty or not, inline or not */
    bool after_key;
};

void json_writer_init(struct json_writer *w, struct text *out);
void json_open(struct json_writer *w, char bracket);        /* '{' or '[' */
void json_open_inline(struct json_writer *w, char bracket); /* everything inside on one line */
void json_close(struct json_writer *w);
void json_key(struct json_writer *w, const char *key);
void json_string(struct json_writer *w, const char *s); /* NULL writes null */
void json_number(struct json_writer *w, double x);
void json_maybe(struct json_writer *w, double x); /* NaN -> null */
void json_bool(struct json_writer *w, bool b);
void json_null(struct json_writer *w);
/* key + value in one call */
void json_key_string(struct json_writer *w, const char *key, const char *s);
void json_key_number(struct json_writer *w, const char *key, double x);
void json_key_maybe(struct json_writer *w, const char *key, double x);
void json_key_bool(struct json_writer *w, const char *key, bool b);
void json_key_null(struct json_writer *w, const char *key);

/* The tree in canonical form (RFC 8785, JSON Canonicalization Scheme): keys sorted by UTF-16 code
 * units, no white space, numbers as number_shortest. */
void json_canonical(struct text *out, const cJSON *tree);

#endif
