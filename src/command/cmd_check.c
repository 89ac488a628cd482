/* SPDX-License-Identifier: GPL-3.0-or-later */
/* cmd_check.c: `terrace check`: a design validated and put in words. */
#include "analysis/analysis.h"
#include "analysis/prior_bands.h"
#include "analysis/vocabulary_rows.h"
#include "base/mem.h"
#include "command/command.h"
#include "command/results.h"
#include "design/design.h"
#include "design/expected.h"
#include "report/check_json.h"
#include "report/check_notes.h"
#include "report/check_text.h"

static const struct option own_options[] = {
    {"schema", 0, OPTION_FLAG, false, NULL, 0, 0,
     "print the JSON Schema of design files (no DESIGN then)"},
    {NULL, 0, OPTION_FLAG, false, NULL, 0, 0, NULL}};

static const char *const example[] = {
    "terrace check data_examples/itch/design.json", "",
    "  prints the design in words: levels, endpoint, priors and what they imply, targets,",
    "  allocation, expected numbers at each planned analysis, decisions and scenarios", NULL};

static const char *const files[] = {"check.json", NULL};
static const struct result_files result_files = {"check", "check.json", files, false};

/* Everything one run holds; released whole, half-built or not. */
struct run {
    struct design *design;
    struct analyst *analyst;
    struct analysis prior;
    bool has_prior, has_notes;
    struct prior_bands bands;
    struct expected expected;
    struct check_notes notes;
    struct outdir *dir;
    struct text json, words;
};

static void run_release(struct run *r)
{
    if (r->has_prior) {
        analysis_release(&r->prior);
    }
    if (r->has_notes) {
        check_notes_release(&r->notes);
    }
    prior_bands_release(&r->bands);
    expected_release(&r->expected);
    analyst_free(r->analyst);
    outdir_free(r->dir);
    design_free(r->design);
    text_release(&r->json);
    text_release(&r->words);
}

static enum status print_schema(const struct options *o, struct err *e)
{
    if (options_has(o, "out")) {
        err_add(e, STATUS_INPUT, NULL, 0, NULL,
                "--schema prints to standard output and takes no --out");
    }
    arguments_check(o, &command_check, 0, e);
    if (e->status != STATUS_OK) {
        return e->status;
    }
    struct text schema = TEXT_INIT;
    design_schema(&schema, &terrace_vocabulary);
    enum status status = output_write(&schema, e);
    text_release(&schema);
    return status;
}

static void look_at_priors(struct run *r)
{
    r->analyst = analyst_new(r->design);
    analysis_init(&r->prior, r->design);
    r->has_prior = true;
    analysis_prior(&r->prior, r->analyst, r->design);
    const struct draws draws = analyst_draws(r->analyst);
    prior_bands_init(&r->bands, r->design, &draws);
}

static void write_documents(struct run *r, const struct terminal *t)
{
    expected_init(&r->expected, r->design);
    check_notes_init(&r->notes, r->design, &r->expected, &r->bands);
    r->has_notes = true;
    struct check_report report = {.d = r->design,
                                  .prior = &r->prior,
                                  .bands = &r->bands,
                                  .expected = &r->expected,
                                  .notes = &r->notes};
    check_json(&r->json, &report);
    check_text(&r->words, &report, t->out_colour);
}

static enum status put_documents(struct run *r, const struct options *o, struct err *e)
{
    enum status status = STATUS_OK;
    if (r->dir) {
        status = outdir_add(r->dir, "check.json", &r->json, e);
    }
    if (status == STATUS_OK) {
        status = results_print(o, &r->json, &r->words, e);
    }
    return status == STATUS_OK && r->dir ? outdir_commit(r->dir, e) : status;
}

static enum status run_all(struct run *r, const struct options *o, const struct terminal *t,
                           struct err *e)
{
    design_read(&r->design, o->argument[0], &terrace_vocabulary, e);
    if (options_has(o, "out")) {
        results_open(&r->dir, options_text(o, "out"), o, &result_files, e);
    }
    if (e->status != STATUS_OK) {
        return e->status;
    }
    if (options_has(o, "seed")) {
        r->design->seed = (uint64_t)options_number(o, "seed", 0);
    }
    look_at_priors(r);
    write_documents(r, t);
    return put_documents(r, o, e);
}

static enum status run_check(const struct options *o, const struct terminal *t, struct err *e)
{
    if (options_has(o, "schema")) {
        return print_schema(o, e);
    }
    if (arguments_check(o, &command_check, command_check.arguments_needed, e) != STATUS_OK) {
        return STATUS_INPUT;
    }
    struct run r = {0};
    enum status status = run_all(&r, o, t, e);
    run_release(&r);
    return status;
}

const struct command command_check = {
    "check",
    "DESIGN",
    1,
    "validate a design and print it in words",
    "Reads a design (JSON), tells every fault with its place, and prints the design in words with\n"
    "the priors in force, what they imply before any data, and the expected numbers of subjects "
    "at\n"
    "each planned analysis. Writes a file (check.json) only with --out.",
    example,
    own_options,
    run_check};
