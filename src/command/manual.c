/* SPDX-License-Identifier: GPL-3.0-or-later */
/* manual.c: writes terrace.1 and terrace.bash from the table of commands. */
#include "command/manual.h"

#include <string.h>

#include "base/base.h"
#include "command/command.h"

/* ---- man ---- */

/* Text as man(7) wants it: backslashes and hyphens escaped, no line that starts with a dot. */
static void add_man(struct text *out, const char *s)
{
    bool start = true;
    for (; *s; s++) {
        if (start && (*s == '.' || *s == '\''))
            text_add(out, "\\&");
        start = *s == '\n';
        if (*s == '\\')
            text_add(out, "\\e");
        else if (*s == '-')
            text_add(out, "\\-");
        else
            text_add_n(out, s, 1);
    }
}

static void man_option(struct text *out, const struct option *o)
{
    text_add(out, ".TP\n.B ");
    if (o->letter)
        text_addf(out, "\\-%c, ", o->letter);
    text_add(out, "\\-\\-");
    add_man(out, o->name);
    if (o->value) {
        text_add(out, " ");
        add_man(out, o->value);
    }
    if (o->repeated)
        text_add(out, " (may be repeated)");
    text_add(out, "\n");
    add_man(out, o->help);
    text_add(out, "\n");
}

static void man_options(struct text *out, const struct option *table)
{
    for (; table->name; table++)
        man_option(out, table);
}

static void man_command(struct text *out, const struct command *c)
{
    text_addf(out, ".SS %s %s\n", c->name, c->arguments);
    add_man(out, c->help);
    text_add(out, "\n");
    man_options(out, c->options);
    text_add(out, ".PP\nExample:\n.PP\n.nf\n");
    for (size_t i = 0; c->example[i]; i++) {
        add_man(out, c->example[i]);
        text_add(out, "\n");
    }
    text_add(out, ".fi\n");
}

void manual_page(struct text *out)
{
    text_add(out,
             ".TH TERRACE 1 \"\" \"" TERRACE_PROGRAM "\" \"\"\n.SH NAME\nterrace \\- Bayesian "
             "adaptive dose\\-ranging and duration\\-ranging trials\n.SH SYNOPSIS\n.B terrace\n"
             "COMMAND [OPTIONS] ARGUMENTS\n.SH COMMANDS\n");
    for (size_t i = 0; commands[i]; i++)
        if (commands[i]->run)
            man_command(out, commands[i]);
    text_add(out, ".SH OPTIONS OF EVERY COMMAND\n");
    man_options(out, common_options);
    text_add(out,
             ".SH EXIT STATUS\n0 done; 1 a check failed; 2 the input is wrong; 3 the computation "
             "cannot be trusted; 4 the system failed; 128 and its number: ended by a signal.\n"
             ".SH ENVIRONMENT\nTERRACE_ISA (an instruction set) and NO_COLOR. Neither changes a "
             "result.\n.SH CAUTION\nDecision support for qualified statisticians; protocol, data "
             "monitoring committee, ethics committees, regulators and local rules decide.\n");
}

/* ---- bash ---- */

static void add_words(struct text *out, const struct option *table)
{
    for (; table->name; table++)
        text_addf(out, " --%s", table->name);
}

void manual_completion(struct text *out)
{
    text_add(out,
             "# bash completion of terrace, made by its build\n_terrace() {\n"
             "    local word=${COMP_WORDS[COMP_CWORD]} command= options i\n"
             "    for ((i = 1; i < COMP_CWORD; i++)); do\n"
             "        case ${COMP_WORDS[i]} in -*) ;; *) command=${COMP_WORDS[i]}; break ;; esac\n"
             "    done\n    case $command in\n");
    for (size_t i = 0; commands[i]; i++) {
        if (!commands[i]->run)
            continue;
        text_addf(out, "    %s) options=\"", commands[i]->name);
        add_words(out, commands[i]->options);
        text_add(out, "\" ;;\n");
    }
    text_add(out, "    *) options=\"");
    for (size_t i = 0; commands[i]; i++)
        if (commands[i]->run)
            text_addf(out, " %s", commands[i]->name);
    text_add(out, " --version\" ;;\n    esac\n    [ -n \"$command\" ] && options+=\"");
    add_words(out, common_options);
    text_add(out, "\"\n    case $word in\n"
                  "    -*) mapfile -t COMPREPLY < <(compgen -W \"$options\" -- \"$word\") ;;\n"
                  "    *) if [ -z \"$command\" ]; then\n"
                  "           mapfile -t COMPREPLY < <(compgen -W \"$options\" -- \"$word\")\n"
                  "       else\n           mapfile -t COMPREPLY < <(compgen -f -- \"$word\")\n"
                  "       fi ;;\n    esac\n}\ncomplete -o filenames -F _terrace terrace\n");
}
