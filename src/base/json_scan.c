/* SPDX-License-Identifier: GPL-3.0-or-later */
/* json_scan.c: the grammar of JSON (RFC 8259), by recursive descent over the bytes. */
#include "base/json_scan.h"

#include <math.h>
#include <stdbool.h>
#include <stdint.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

#include "base/json_messages.h"
#include "base/text.h"

struct scan {
    const char *at, *end;
    long line;
    int depth;
    const char *file;
    struct err *e;
};

#define FAULT(s, ...) ((void)err_add((s)->e, STATUS_INPUT, (s)->file, (s)->line, NULL, __VA_ARGS__))

/* A fault of the structure: nothing after it can be read with sense. */
#define STOP(s, ...) (FAULT(s, __VA_ARGS__), false)
#define STOP_FOUND(s, message) STOP(s, message, found(s, (char[16]){0}))

static bool scan_value(struct scan *s);

/* The next byte, or 0 at the end (a NUL byte in the file is a fault wherever it stands). */
static char peek(const struct scan *s)
{
    return s->at < s->end ? *s->at : '\0';
}

static bool is_digit(char c)
{
    return c >= '0' && c <= '9';
}

static bool is_letter(char c)
{
    return (c >= 'a' && c <= 'z') || (c >= 'A' && c <= 'Z') || c == '_';
}

/* What stands at the reading position, for messages. */
static const char *found(const struct scan *s, char spare[16])
{
    size_t step;

    if (s->at >= s->end)
        return "the end of the file";
    step = text_utf8_step(s->at, (size_t)(s->end - s->at), NULL);
    if ((unsigned char)*s->at < 0x20 || *s->at == 0x7F)
        snprintf(spare, 16, "U+%04X", (unsigned)(unsigned char)*s->at);
    else
        snprintf(spare, 16, "'%.*s'", (int)step, s->at);
    return spare;
}

static void skip_space(struct scan *s)
{
    for (; s->at < s->end; s->at++) {
        if (*s->at == '\n')
            s->line++;
        else if (*s->at != ' ' && *s->at != '\t' && *s->at != '\r')
            return;
    }
}

/* --- texts --- */

/* The four hexadecimal digits at s->at, or -1. */
static long hex_value(const struct scan *s)
{
    long value = 0;

    if (s->end - s->at < 4)
        return -1;
    for (int i = 0; i < 4; i++) {
        static const char digits[] = "0123456789abcdef0123456789ABCDEF";
        const char *digit = s->at[i] == '\0' ? NULL : strchr(digits, s->at[i]);

        if (digit == NULL)
            return -1;
        value = 16 * value + (digit - digits) % 16;
    }
    return value;
}

/* After "\u". Half a character (a lone surrogate) has no UTF-8 form. */
static void scan_hex(struct scan *s)
{
    long value = hex_value(s), second;

    if (value < 0) {
        FAULT(s, JSON_MSG_HEX);
        return;
    }
    s->at += 4;
    if (value == 0) {
        FAULT(s, JSON_MSG_NUL);
    } else if (value >= 0xDC00 && value <= 0xDFFF) {
        FAULT(s, JSON_MSG_SURROGATE, (unsigned)value);
    } else if (value >= 0xD800 && value <= 0xDBFF) {
        struct scan next = *s;

        next.at += 2;
        second = s->end - s->at >= 6 && memcmp(s->at, "\\u", 2) == 0 ? hex_value(&next) : -1;
        if (second >= 0xDC00 && second <= 0xDFFF)
            s->at += 6;
        else
            FAULT(s, JSON_MSG_SURROGATE, (unsigned)value);
    }
}

/* After the backslash; leaves a line end for scan_text. */
static void scan_escape(struct scan *s)
{
    char c = peek(s);

    if (c == 'u') {
        s->at++;
        scan_hex(s);
    } else if (c != '\0' && strchr("\"\\/bfnrt", c) != NULL) {
        s->at++;
    } else {
        FAULT(s, JSON_MSG_ESCAPE, found(s, (char[16]){0}));
        if (s->at < s->end && (unsigned char)c >= 0x20)
            s->at++;
    }
}

/* s->at is on the opening quote. */
static bool scan_text(struct scan *s)
{
    s->at++;
    while (s->at < s->end) {
        unsigned char c = (unsigned char)*s->at;

        if (c == '\n' || c == '\r')
            break;
        s->at++;
        if (c == '"')
            return true;
        if (c == '\\')
            scan_escape(s);
        else if (c < 0x20)
            FAULT(s, JSON_MSG_CONTROL, (unsigned)c, (unsigned)c);
    }
    return STOP(s, JSON_MSG_UNCLOSED);
}

/* --- numbers --- */

static void skip_digits(struct scan *s)
{
    while (is_digit(peek(s)))
        s->at++;
}

/* The number from `start` to s->at keeps the grammar; cJSON and a double must hold it too. */
static void check_size(struct scan *s, const char *start)
{
    char copy[JSON_NUMBER_CHARS + 1];
    size_t length = (size_t)(s->at - start);

    if (length > JSON_NUMBER_CHARS) {
        FAULT(s, JSON_MSG_LONG, length, JSON_NUMBER_CHARS);
        return;
    }
    memcpy(copy, start, length);
    copy[length] = '\0';
    if (isinf(strtod(copy, NULL)))
        FAULT(s, JSON_MSG_HUGE, copy);
}

/* After the whole part. False when a fault was added. */
static bool scan_fraction(struct scan *s)
{
    if (peek(s) == '.') {
        s->at++;
        if (!is_digit(peek(s)))
            return STOP(s, JSON_MSG_POINT);
        skip_digits(s);
    }
    if (peek(s) == 'e' || peek(s) == 'E') {
        s->at++;
        if (peek(s) == '+' || peek(s) == '-')
            s->at++;
        if (!is_digit(peek(s)))
            return STOP(s, JSON_MSG_EXPONENT);
        skip_digits(s);
    }
    return true;
}

static bool scan_word(struct scan *s);

static bool scan_number(struct scan *s)
{
    const char *start = s->at;
    bool needless;

    if (peek(s) == '-')
        s->at++;
    if (is_letter(peek(s)) || (peek(s) == '.' && s->end - s->at > 1 && !is_digit(s->at[1]))) {
        s->at = start; /* -Infinity, -NaN */
        return scan_word(s);
    }
    if (peek(s) == '.')
        return STOP(s, JSON_MSG_POINT);
    if (!is_digit(peek(s)))
        return STOP_FOUND(s, JSON_MSG_MINUS);
    needless = peek(s) == '0' && s->end - s->at > 1 && is_digit(s->at[1]);
    if (needless)
        FAULT(s, JSON_MSG_LEADING_ZERO);
    skip_digits(s);
    if (!scan_fraction(s))
        return false;
    check_size(s, start);
    return true;
}

/* --- structure --- */

static bool word_is(const char *start, size_t length, const char *word)
{
    return length == strlen(word) && memcmp(start, word, length) == 0;
}

/* A bare word; the fault shows at most 20 characters of it. */
static bool scan_word(struct scan *s)
{
    const char *start = s->at;
    size_t length;

    if (*s->at == '-')
        s->at++;
    while (is_letter(peek(s)) || is_digit(peek(s)))
        s->at++;
    length = (size_t)(s->at - start);
    if (word_is(start, length, "true") || word_is(start, length, "false") ||
        word_is(start, length, "null"))
        return true;
    FAULT(s, JSON_MSG_WORD, (int)(length > 20 ? 20 : length), start);
    return true; /* a misspelt word is no reason to stop */
}

static bool at_comment(const struct scan *s)
{
    return peek(s) == '#' ||
           (peek(s) == '/' && s->end - s->at > 1 && (s->at[1] == '/' || s->at[1] == '*'));
}

/* The fault for a place where `message` says what is needed: comments and single quotes, the two
 * habits from other notations, have their own. */
#define STOP_NEEDED(s, message)                         \
    (at_comment(s)     ? STOP(s, JSON_MSG_COMMENT)      \
     : peek(s) == '\'' ? STOP(s, JSON_MSG_SINGLE_QUOTE) \
                       : STOP_FOUND(s, message))

static bool scan_member(struct scan *s)
{
    if (peek(s) != '"')
        return STOP_NEEDED(s, JSON_MSG_NAME);
    if (!scan_text(s))
        return false;
    skip_space(s);
    if (peek(s) != ':')
        return STOP_NEEDED(s, JSON_MSG_COLON);
    s->at++;
    return scan_value(s);
}

/* Behind an element: 1 another follows, 0 the container is closed, -1 fault. */
static int scan_next(struct scan *s, char close)
{
    skip_space(s);
    if (peek(s) == close) {
        s->at++;
        return 0;
    }
    if (peek(s) != ',') {
        if (close == '}')
            (void)STOP_NEEDED(s, JSON_MSG_OBJECT_NEXT);
        else
            (void)STOP_NEEDED(s, JSON_MSG_LIST_NEXT);
        return -1;
    }
    s->at++;
    skip_space(s);
    if (peek(s) == close) {
        FAULT(s, JSON_MSG_LAST_COMMA, close);
        s->at++;
        return 0;
    }
    return 1;
}

/* s->at is on the opening bracket. */
static bool scan_container(struct scan *s, char close)
{
    int next;

    if (s->depth == JSON_DEPTH)
        return STOP(s, JSON_MSG_DEPTH, (int)JSON_DEPTH);
    s->depth++;
    s->at++;
    skip_space(s);
    next = peek(s) == close ? 0 : 1;
    if (next == 0)
        s->at++;
    while (next == 1) {
        if (!(close == '}' ? scan_member(s) : scan_value(s)))
            return false;
        next = scan_next(s, close);
    }
    s->depth--;
    return next == 0;
}

static bool scan_value(struct scan *s)
{
    char c;

    skip_space(s);
    c = peek(s);
    if (c == '{' || c == '[')
        return scan_container(s, c == '{' ? '}' : ']');
    if (c == '"')
        return scan_text(s);
    if (c == '-' || is_digit(c))
        return scan_number(s);
    if (is_letter(c))
        return scan_word(s);
    if (c == '+')
        return STOP(s, JSON_MSG_PLUS);
    if (c == '.')
        return STOP(s, JSON_MSG_POINT);
    return STOP_NEEDED(s, JSON_MSG_VALUE);
}

/* --- the file as a whole --- */

static bool check_utf8(struct scan *s)
{
    const char *p = s->at;
    long line = 1;

    while (p < s->end) {
        size_t step = text_utf8_step(p, (size_t)(s->end - p), NULL);

        if (step == 0) {
            s->line = line;
            return STOP(s, JSON_MSG_UTF8, (unsigned)(unsigned char)*p);
        }
        line += *p == '\n';
        p += step;
    }
    return true;
}

enum status json_scan(const char *bytes, size_t length, const char *file, struct err *e)
{
    struct scan s = {bytes, bytes + length, 1, 0, file, e};
    size_t before = e->count;

    if (length >= 3 && memcmp(bytes, "\xEF\xBB\xBF", 3) == 0)
        return err_add(e, STATUS_INPUT, file, 1, NULL, JSON_MSG_BOM);
    if (!check_utf8(&s))
        return STATUS_INPUT;
    skip_space(&s);
    if (s.at == s.end)
        return err_add(e, STATUS_INPUT, file, 0, NULL, JSON_MSG_EMPTY);
    if (scan_value(&s)) {
        skip_space(&s);
        if (s.at < s.end && at_comment(&s))
            FAULT(&s, JSON_MSG_COMMENT);
        else if (s.at < s.end)
            FAULT(&s, JSON_MSG_TRAILING, found(&s, (char[16]){0}));
    }
    return e->count > before ? STATUS_INPUT : STATUS_OK;
}
