/* SPDX-License-Identifier: GPL-3.0-or-later */
/* commands.c: the one list of commands, and the help that is made from it. */
#include <stdio.h>
#include <string.h>

#include "base/base.h"
#include "command/command.h"

/* Names that are spoken for: a later version has them. */
#define LATER(id, word, what) \
    static const struct command id = {word, "", 0, what, NULL, NULL, NULL, NULL}

LATER(command_simulate, "simulate", "operating characteristics over the scenarios");
LATER(command_gather, "gather", "one result from the parts of a run");
LATER(command_replay, "replay", "one simulated trial, analysis by analysis");
LATER(command_compare, "compare", "several designs side by side");
LATER(command_calibrate, "calibrate", "thresholds that keep an error rate");
LATER(command_tune, "tune", "design constants by search");
LATER(command_document, "document", "a design's report for a protocol");
LATER(command_seal, "seal", "freeze a design before the trial");
LATER(command_verify, "verify", "prove that sealed files are unchanged");
LATER(command_randomize, "randomize", "the next subjects' levels");

const struct command *const commands[] = {
    &command_check,    &command_analyze,   &command_fit,     &command_simulate,  &command_gather,
    &command_replay,   &command_selfcheck, &command_compare, &command_calibrate, &command_tune,
    &command_document, &command_seal,      &command_verify,  &command_randomize, NULL};

const struct command *command_find(const char *name)
{
    for (size_t i = 0; commands[i]; i++) {
        if (strcmp(commands[i]->name, name) == 0) {
            return commands[i];
        }
    }
    return NULL;
}

static void add_names(struct text *out, bool later)
{
    const char *before = "";
    for (size_t i = 0; commands[i]; i++) {
        if ((commands[i]->run == NULL) == later) {
            text_addf(out, "%s%s", before, commands[i]->name);
            before = ", ";
        }
    }
}

void help_program(struct text *out)
{
    text_add(out, "terrace: Bayesian adaptive dose-ranging and duration-ranging trials\n\n"
                  "Usage: terrace COMMAND [OPTIONS] ARGUMENTS\n\nCommands\n");
    for (size_t i = 0; commands[i]; i++) {
        const struct command *c = commands[i];
        if (c->run) {
            char left[64];
            snprintf(left, sizeof left, "%s %s", c->name, c->arguments);
            text_add(out, "  ");
            text_pad_to(out, left, 22);
            text_addf(out, " %s\n", c->job);
        }
    }
    text_add(out, "\n'terrace COMMAND --help' explains a command; 'terrace --version' prints the "
                  "version.\nNot in this version yet: ");
    add_names(out, true);
    text_add(out, ".\n\nExit status: 0 done; 1 a check failed; 2 the input is wrong; 3 the "
                  "computation cannot be\ntrusted; 4 the system failed.\n");
}

void help_command(struct text *out, const struct command *c)
{
    text_addf(out, "Usage: terrace %s [OPTIONS] %s\n\n%s\n\n", c->name, c->arguments, c->help);
    if (c->options->name) {
        text_addf(out, "Options of %s\n", c->name);
        options_help(out, c->options);
        text_add(out, "\n");
    }
    text_add(out, "Options of every command\n");
    options_help(out, common_options);
    text_add(out, "\nExample\n");
    for (size_t i = 0; c->example[i]; i++) {
        text_addf(out, "  %s\n", c->example[i]);
    }
}

/* The i-th word of "DESIGN DATA", or "" beyond the last. */
static void argument_name(char *out, size_t size, const char *names, size_t i)
{
    while (i-- > 0 && *names) {
        names += strcspn(names, " ");
        names += strspn(names, " ");
    }
    snprintf(out, size, "%.*s", (int)strcspn(names, " "), names);
}

enum status arguments_check(const struct options *o, const struct command *c, size_t needed,
                            struct err *e)
{
    char name[32];
    for (size_t i = o->arguments; i < needed; i++) {
        argument_name(name, sizeof name, c->arguments, i);
        err_add(e, STATUS_INPUT, NULL, 0, NULL, "missing argument %s: terrace %s %s", name, c->name,
                c->arguments);
    }
    for (size_t i = needed; i < o->arguments; i++) {
        err_add(e, STATUS_INPUT, NULL, 0, NULL, "unexpected argument '%s': terrace %s %s",
                o->argument[i], c->name, c->arguments);
    }
    return o->arguments == needed ? STATUS_OK : STATUS_INPUT;
}
