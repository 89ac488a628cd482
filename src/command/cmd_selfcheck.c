/* SPDX-License-Identifier: GPL-3.0-or-later */
/* cmd_selfcheck.c: `terrace selfcheck`: the built-in checks, as evidence. */
#include "base/mem.h"
#include "command/command.h"
#include "command/results.h"
#include "report/selfcheck_report.h"

static const struct option own_options[] = {{NULL, 0, OPTION_FLAG, false, NULL, 0, 0, NULL}};

static const char *const example[] = {
    "terrace selfcheck --out evidence", "",
    "  runs every check, prints published value, ours, difference and verdict, and writes",
    "  selfcheck.json and report.html into evidence/. Status 1 if a check fails.", NULL};

static const char *const files[] = {"selfcheck.json", "report.html", NULL};
static const struct result_files result_files = {"selfcheck", "selfcheck.json", files, false};

static void tell(const struct check *c)
{
    output_note(c->key);
}

static enum status put_documents(struct outdir *dir, const struct options *o,
                                 const struct selfcheck *s, struct err *e)
{
    struct text json = TEXT_INIT, page = TEXT_INIT, tables = TEXT_INIT;
    enum status status = STATUS_OK;
    selfcheck_json(&json, s);
    selfcheck_page(&page, s);
    selfcheck_text(&tables, s);
    if (dir)
        status = outdir_add(dir, "report.html", &page, e);
    if (dir && status == STATUS_OK)
        status = outdir_add(dir, "selfcheck.json", &json, e);
    if (status == STATUS_OK)
        status = results_print(o, &json, &tables, e);
    if (dir && status == STATUS_OK)
        status = outdir_commit(dir, e);
    text_release(&json);
    text_release(&page);
    text_release(&tables);
    return status;
}

static enum status run_selfcheck(const struct options *o, const struct terminal *t, struct err *e)
{
    struct outdir *dir = NULL;
    struct selfcheck s;
    if (arguments_check(o, &command_selfcheck, 0, e) != STATUS_OK)
        return STATUS_INPUT;
    const char *out = options_text(o, "out");
    if (out && results_open(&dir, out, o, &result_files, e) != STATUS_OK)
        return e->status;
    if (e->status == STATUS_OK) {
        selfcheck_run(&s, t->progress ? tell : NULL);
        if (put_documents(dir, o, &s, e) == STATUS_OK && s.failed > 0)
            err_add(e, STATUS_CHECK_FAILED, NULL, 0, NULL, "%zu of %zu checks failed", s.failed,
                    s.count);
        selfcheck_release(&s);
    }
    outdir_free(dir);
    return e->status;
}

const struct command command_selfcheck = {
    "selfcheck",
    "",
    0,
    "run the built-in published checks",
    "Runs the checks that are built into the program: likelihood fits against published tables,\n"
    "arithmetic against handbooks, posteriors against closed forms and a second method. Prints "
    "every\n"
    "value; with --out DIR writes the evidence as report.html and selfcheck.json.",
    example,
    own_options,
    run_selfcheck};
