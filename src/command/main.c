/* SPDX-License-Identifier: GPL-3.0-or-later */
/* main.c: finds the command, reads its options, runs it, prints faults, chooses the exit status. */
#include <stdio.h>
#include <string.h>

#include "base/base.h"
#include "base/isa.h"
#include "base/mem.h"
#include "command/command.h"

enum { COMMAND_NAMES_MOST = 32 };

/* The row of an option of any command: which words take a value does not depend on the command,
 * so that options may stand before it. */
static const struct option *option_of_any(const char *word)
{
    const struct option *row = option_find(NULL, word);
    for (size_t i = 0; !row && commands[i]; i++) {
        row = option_find(commands[i]->options, word);
    }
    return row;
}

/* Index of the command's name: the first word that is neither an option nor an option's value;
 * argc when there is none. */
static int command_place(int argc, char **argv)
{
    for (int i = 1; i < argc; i++) {
        const char *word = argv[i];
        if (strcmp(word, "--") == 0) {
            return i + 1 < argc ? i + 1 : argc;
        }
        if (word[0] != '-' || word[1] == '\0') {
            return i;
        }
        const struct option *row = option_of_any(word);
        if (row && row->kind != OPTION_FLAG && !strchr(word, '=')) {
            i++;
        }
    }
    return argc;
}

static enum status fault_unknown_command(const char *word, struct err *e)
{
    const char *names[COMMAND_NAMES_MOST];
    size_t n = 0;
    for (; commands[n] && n + 1 < COMMAND_NAMES_MOST; n++) {
        names[n] = commands[n]->name;
    }
    names[n] = NULL;
    const char *near = text_nearest(word, names);
    if (near) {
        return err_add(e, STATUS_INPUT, NULL, 0, NULL, "unknown command '%s'; did you mean '%s'?",
                       word, near);
    }
    return err_add(e, STATUS_INPUT, NULL, 0, NULL,
                   "unknown command '%s'; 'terrace --help' lists the commands", word);
}

/* Without a command: --version or --help, and nothing else. */
static enum status run_bare(int argc, char **argv, struct err *e)
{
    struct text out = TEXT_INIT;
    enum status status = STATUS_OK;
    if (argc == 2 && strcmp(argv[1], "--version") == 0) {
        text_add(&out, TERRACE_PROGRAM "\n");
    } else if (argc == 2 && strcmp(argv[1], "--help") == 0) {
        help_program(&out);
    } else if (argc > 1 && !option_of_any(argv[1]) && strcmp(argv[1], "--version") != 0) {
        const char *names[] = {"help", "version", NULL};
        const char *near = text_nearest(argv[1] + strspn(argv[1], "-"), names);
        status = err_add(e, STATUS_INPUT, NULL, 0, NULL, "unknown option %s; did you mean --%s?",
                         argv[1], near ? near : "help");
    } else {
        status = err_add(e, STATUS_INPUT, NULL, 0, NULL,
                         "no command given; 'terrace --help' lists the commands");
    }
    if (status == STATUS_OK) {
        status = output_write(&out, e);
    }
    text_release(&out);
    return status;
}

static enum status run_options(const struct command *c, const struct options *o, struct err *e)
{
    if (!o->usable) {
        return STATUS_INPUT;
    }
    if (options_has(o, "help")) {
        if (e->status != STATUS_OK) {
            return e->status;
        }
        struct text out = TEXT_INIT;
        help_command(&out, c);
        enum status status = output_write(&out, e);
        text_release(&out);
        return status;
    }
    struct terminal t = terminal_look(o);
    isa_check(e); /* its fault stands in e: the command computes nothing then */
    return c->run(o, &t, e);
}

static enum status run_command(int argc, char **argv, int place, struct err *e)
{
    const struct command *c = command_find(argv[place]);
    if (!c) {
        return fault_unknown_command(argv[place], e);
    }
    if (!c->run) {
        return err_add(e, STATUS_INPUT, NULL, 0, NULL,
                       "this version (" TERRACE_VERSION ") does not have '%s' yet (%s)", c->name,
                       c->job);
    }
    size_t count = 0;
    const char **words = mem_new((size_t)argc, sizeof *words);
    for (int i = 1; i < argc; i++) {
        if (i != place) {
            words[count++] = argv[i];
        }
    }
    struct options o = OPTIONS_INIT;
    options_parse(&o, c->name, c->options, count, words, e);
    enum status status = run_options(c, &o, e);
    options_release(&o);
    mem_free(words);
    return status;
}

int main(int argc, char **argv)
{
    base_init();
    base_watch_signals();
    terminal_open_descriptors();
    struct err e = ERR_INIT;
    int place = command_place(argc, argv);
    enum status status =
        place < argc ? run_command(argc, argv, place, &e) : run_bare(argc, argv, &e);
    if (e.status > status) {
        status = e.status;
    }
    struct text faults = TEXT_INIT;
    err_text(&e, &faults);
    fputs(text_s(&faults), stderr);
    text_release(&faults);
    err_release(&e);
    return (int)status;
}
