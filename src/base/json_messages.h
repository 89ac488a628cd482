/* SPDX-License-Identifier: GPL-3.0-or-later */
/* json_messages.h: what json_parse says about each fault: what is wrong, what is allowed. */
#ifndef TERRACE_JSON_MESSAGES_H
#define TERRACE_JSON_MESSAGES_H

/* the file as a whole */
#define JSON_MSG_EMPTY "the file is empty; a JSON value is needed"
#define JSON_MSG_BOM                                                                        \
    "the file starts with a byte order mark; save it as UTF-8 without one (\"UTF-8\", not " \
    "\"UTF-8 with BOM\")"
#define JSON_MSG_UTF8 "byte 0x%02x is not valid UTF-8; save the file as UTF-8"
#define JSON_MSG_TRAILING "%s follows the end of the JSON value; one value fills the whole file"

/* structure */
#define JSON_MSG_VALUE                                                                            \
    "a value is needed here, not %s; a value is an object, a list, a string in double quotes, a " \
    "number, true, false or null"
#define JSON_MSG_WORD                                                                           \
    "'%.*s' is not a JSON value; the only bare words are true, false and null (texts stand in " \
    "double quotes)"
#define JSON_MSG_COMMENT "JSON has no comments; leave this one out"
#define JSON_MSG_SINGLE_QUOTE "texts and names stand in double quotes, not in single quotes"
#define JSON_MSG_NAME "a member name in double quotes is needed here, not %s"
#define JSON_MSG_COLON "a ':' is needed after the member name, not %s"
#define JSON_MSG_OBJECT_NEXT "a ',' or '}' is needed after a member, not %s"
#define JSON_MSG_LIST_NEXT "a ',' or ']' is needed after an element, not %s"
#define JSON_MSG_LAST_COMMA "no comma may stand before the closing '%c'"
#define JSON_MSG_DEPTH "nested too deeply; at most %d objects and lists may stand inside each other"

/* strings */
#define JSON_MSG_UNCLOSED "the text that starts on this line has no closing double quote on it"
#define JSON_MSG_CONTROL "control character U+%04X in a text; write it as \\u%04x"
#define JSON_MSG_ESCAPE                                                                           \
    "unknown escape in a text, a backslash before %s; allowed are \\\" \\\\ \\/ \\b \\f \\n \\r " \
    "\\t and \\u "                                                                                \
    "with four hexadecimal digits"
#define JSON_MSG_HEX "\\u needs four hexadecimal digits after it"
#define JSON_MSG_SURROGATE                                                                   \
    "\\u%04x is half a character; \\ud800 to \\udbff must be followed by one of \\udc00 to " \
    "\\udfff, which stands nowhere else"
#define JSON_MSG_NUL "\\u0000 is not allowed in a text"

/* numbers */
#define JSON_MSG_PLUS "a number may not start with '+'"
#define JSON_MSG_POINT "a number needs a digit on both sides of its decimal point"
#define JSON_MSG_MINUS "a digit is needed after '-', not %s"
#define JSON_MSG_LEADING_ZERO "a number may not start with a needless 0"
#define JSON_MSG_EXPONENT "a number needs a digit in its exponent"
#define JSON_MSG_HUGE "the number %s is too large; the largest is about 1.8e308"
#define JSON_MSG_LONG "the number is written with %zu characters; at most %d are allowed"

/* the tree */
#define JSON_MSG_TWICE "the member \"%s\" is given %zu times; once is allowed"

#endif
