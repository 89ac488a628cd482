/* SPDX-License-Identifier: GPL-3.0-or-later */
/* csv_messages.h: what csv_read says about each fault: what is wrong, what is allowed. */
#ifndef TERRACE_CSV_MESSAGES_H
#define TERRACE_CSV_MESSAGES_H

/* the file as a whole */
#define CSV_MSG_EMPTY "the file is empty; a header line with the column names is needed"
#define CSV_MSG_UTF16 "the file is UTF-16; save it as UTF-8"

/* a row */
#define CSV_MSG_UTF8 "byte 0x%02x is not valid UTF-8; save the file as UTF-8"
#define CSV_MSG_NUL "a NUL byte, which no text file holds"
#define CSV_MSG_QUOTE_INSIDE                                                                   \
    "field %zu has a double quote but does not start with one; put the whole field in double " \
    "quotes and write each quote inside it twice"
#define CSV_MSG_QUOTE_AFTER                                                                      \
    "field %zu goes on after its closing double quote; only a comma or the end of the line may " \
    "follow (a quote inside a field is written twice)"
#define CSV_MSG_QUOTE_OPEN                                                                       \
    "field %zu starts with a double quote that is never closed; close it before the next comma " \
    "or line end"
#define CSV_MSG_FIELDS "the row has %zu %s where the header has %zu"

/* the header */
#define CSV_MSG_NO_NAME "column %zu has no name; every column needs one"
#define CSV_MSG_NAME_TWICE "the column name \"%s\" stands for columns %zu and %zu; names are unique"

#endif
