/* SPDX-License-Identifier: GPL-3.0-or-later */
/* options.c: the command line, read against one table of options a command. */
#include "command/options.h"

#include <string.h>

#include "base/base.h"
#include "base/mem.h"
#include "base/number.h"

enum { THREADS_MOST = 1024, NAMES_MOST = 40, HELP_COLUMN = 22 };

const struct option common_options[] = {
    {"out", 'o', OPTION_TEXT, false, "DIR", 0, 0, "directory for the result files"},
    {"seed", 0, OPTION_WHOLE, false, "N", 0, 9007199254740991.0,
     "seed of the random numbers, 0 to 2^53 - 1 (wins over the design's)"},
    {"threads", 0, OPTION_WHOLE, false, "T", 1, THREADS_MOST,
     "threads (default: the processors this process may use); never changes a result"},
    {"force", 0, OPTION_FLAG, false, NULL, 0, 0, "replace this command's files in the directory"},
    {"quiet", 0, OPTION_FLAG, false, NULL, 0, 0, "no tables and no notes, only faults"},
    {"json", 0, OPTION_FLAG, false, NULL, 0, 0,
     "standard output is exactly the bytes of the command's JSON"},
    {"progress", 0, OPTION_FLAG, false, NULL, 0, 0,
     "tell progress on standard error, also when it is no terminal"},
    {"help", 0, OPTION_FLAG, false, NULL, 0, 0, "this text"},
    {NULL, 0, OPTION_FLAG, false, NULL, 0, 0, NULL}};

void options_release(struct options *o)
{
    mem_free(o->given);
    mem_free(o->argument);
    *o = (struct options)OPTIONS_INIT;
}

/* Length of the option's name in a word: up to '=' or the end. */
static size_t name_length(const char *word)
{
    const char *equals = strchr(word, '=');
    return equals ? (size_t)(equals - word) : strlen(word);
}

static bool row_matches(const struct option *row, const char *word)
{
    if (word[0] == '-' && word[1] != '-') {
        return row->letter && word[1] == row->letter && word[2] == '\0';
    }
    size_t n = name_length(word + 2);
    return strlen(row->name) == n && strncmp(row->name, word + 2, n) == 0;
}

static const struct option *find_in(const struct option *table, const char *word)
{
    for (const struct option *row = table; row && row->name; row++) {
        if (row_matches(row, word)) {
            return row;
        }
    }
    return NULL;
}

const struct option *option_find(const struct option *own, const char *word)
{
    if (word[0] != '-' || word[1] == '\0') {
        return NULL;
    }
    const struct option *row = find_in(own, word);
    return row ? row : find_in(common_options, word);
}

static const struct option *find_name(const struct options *o, const char *name)
{
    const struct option *tables[] = {o->own, common_options};
    for (size_t t = 0; t < COUNT_OF(tables); t++) {
        for (const struct option *row = tables[t]; row && row->name; row++) {
            if (strcmp(row->name, name) == 0) {
                return row;
            }
        }
    }
    BUG("an option is asked for that no table holds");
}

const char *options_each(const struct options *o, const char *name, size_t i)
{
    const struct option *row = find_name(o, name);
    for (size_t g = 0; g < o->count; g++) {
        if (o->given[g].option == row && i-- == 0) {
            return o->given[g].text;
        }
    }
    return NULL;
}

static const struct option_given *first_given(const struct options *o, const struct option *row)
{
    for (size_t g = 0; g < o->count; g++) {
        if (o->given[g].option == row) {
            return &o->given[g];
        }
    }
    return NULL;
}

bool options_has(const struct options *o, const char *name)
{
    return first_given(o, find_name(o, name)) != NULL;
}

const char *options_text(const struct options *o, const char *name)
{
    const struct option_given *g = first_given(o, find_name(o, name));
    return g ? g->text : NULL;
}

double options_number(const struct options *o, const char *name, double absent)
{
    const struct option_given *g = first_given(o, find_name(o, name));
    return g ? g->number : absent;
}

/* "unknown option --sed of `check`; did you mean --seed?" */
static void fault_unknown(const struct options *o, const char *command, const char *word,
                          struct err *e)
{
    const char *names[NAMES_MOST];
    size_t n = 0;
    const struct option *tables[] = {o->own, common_options};
    for (size_t t = 0; t < COUNT_OF(tables); t++) {
        for (const struct option *row = tables[t]; row && row->name && n + 1 < NAMES_MOST; row++) {
            names[n++] = row->name;
        }
    }
    names[n] = NULL;
    const char *bare = word + strspn(word, "-");
    char *asked = mem_text_n(bare, name_length(bare));
    const char *near = text_nearest(asked, names);
    int shown = (int)(strlen(word) - strlen(bare) + strlen(asked));
    if (near) {
        err_add(e, STATUS_INPUT, NULL, 0, NULL, "unknown option %.*s of '%s'; did you mean --%s?",
                shown, word, command, near);
    } else {
        err_add(e, STATUS_INPUT, NULL, 0, NULL,
                "unknown option %.*s of '%s'; 'terrace %s --help' lists the options", shown, word,
                command, command);
    }
    mem_free(asked);
}

static void fault_whole(const struct option *row, const char *text, struct err *e)
{
    char low[NUMBER_CHARS], high[NUMBER_CHARS];
    err_add(e, STATUS_INPUT, NULL, 0, NULL, "--%s: '%s' is not a whole number from %s to %s",
            row->name, text, number_shortest(low, row->low), number_shortest(high, row->high));
}

static void keep_given(struct options *o, const struct option *row, const char *text, double number)
{
    o->given = mem_grow(o->given, o->count + 1, sizeof *o->given);
    o->given[o->count++] = (struct option_given){row, text, number};
}

/* The value of a row as typed: after '=' or the next word; NULL with a fault when there is none. */
static const char *take_value(const struct option *row, const char *word, size_t *i, size_t count,
                              const char *const *words, struct err *e)
{
    const char *equals = word[1] == '-' ? strchr(word, '=') : NULL;
    const char *text = equals ? equals + 1 : NULL;
    if (!equals && *i + 1 < count && strncmp(words[*i + 1], "--", 2) != 0) {
        text = words[++*i];
    }
    if (!text || *text == '\0') {
        err_add(e, STATUS_INPUT, NULL, 0, NULL, "--%s needs a value: --%s %s", row->name, row->name,
                row->value);
        return NULL;
    }
    return text;
}

static void read_flag(struct options *o, const struct option *row, const char *word, struct err *e)
{
    if (strchr(word, '=')) {
        err_add(e, STATUS_INPUT, NULL, 0, NULL, "--%s takes no value", row->name);
    }
    keep_given(o, row, NULL, 1);
}

static void read_option(struct options *o, const struct option *row, const char *word, size_t *i,
                        size_t count, const char *const *words, struct err *e)
{
    if (!row->repeated && first_given(o, row)) {
        err_add(e, STATUS_INPUT, NULL, 0, NULL, "--%s is given more than once", row->name);
    }
    if (row->kind == OPTION_FLAG) {
        read_flag(o, row, word, e);
        return;
    }
    const char *text = take_value(row, word, i, count, words, e);
    if (!text) {
        o->usable = false;
        return;
    }
    double number = 0;
    if (!text_is_utf8(text, strlen(text))) {
        err_add(e, STATUS_INPUT, NULL, 0, NULL, "--%s: the value is not valid UTF-8", row->name);
    } else if (row->kind == OPTION_WHOLE &&
               !number_parse_whole(text, row->low, row->high, &number)) {
        fault_whole(row, text, e);
        number = row->low;
    }
    keep_given(o, row, text, number);
}

enum status options_parse(struct options *out, const char *command, const struct option *own,
                          size_t count, const char *const *words, struct err *e)
{
    size_t faults = e->count;
    out->own = own;
    out->argument = mem_new(count + 1, sizeof *out->argument);
    bool ended = false;
    for (size_t i = 0; i < count; i++) {
        const char *word = words[i];
        if (ended || word[0] != '-' || word[1] == '\0') {
            out->argument[out->arguments++] = word;
        } else if (strcmp(word, "--") == 0) {
            ended = true;
        } else {
            const struct option *row = option_find(own, word);
            if (row) {
                read_option(out, row, word, &i, count, words, e);
            } else {
                fault_unknown(out, command, word, e);
                out->usable = false;
            }
        }
    }
    return e->count > faults ? STATUS_INPUT : STATUS_OK;
}

void options_help(struct text *out, const struct option *table)
{
    for (const struct option *row = table; row && row->name; row++) {
        struct text left = TEXT_INIT;
        if (row->letter) {
            text_addf(&left, "-%c, ", row->letter);
        }
        text_addf(&left, "--%s", row->name);
        if (row->value) {
            text_addf(&left, " %s%s", row->value, row->repeated ? "…" : "");
        }
        text_add(out, "  ");
        text_pad_to(out, text_s(&left), HELP_COLUMN);
        text_addf(out, " %s\n", row->help);
        text_release(&left);
    }
}
