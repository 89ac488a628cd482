/* SPDX-License-Identifier: GPL-3.0-or-later */
/* cmd_fit.c: `terrace fit`: one curve to one table, likelihood beside posterior. */
#include <string.h>

#include "analysis/analysis.h"
#include "analysis/vocabulary_rows.h"
#include "base/mem.h"
#include "command/command.h"
#include "command/results.h"
#include "design/fit_table.h"
#include "report/fit_report.h"

static const struct option own_options[] = {
    {"curve", 0, OPTION_TEXT, false, "CURVE", 0, 0, "the curve, with default priors"},
    {"model", 0, OPTION_TEXT, false, "FILE", 0, 0,
     "a model object (JSON: curve, priors, order, ...) instead of --curve"},
    {"endpoint", 0, OPTION_TEXT, false, "TYPE", 0, 0,
     "continuous or binary (default: binary if there is a column events)"},
    {"fix", 0, OPTION_TEXT, true, "NAME=VALUE", 0, 0, "this parameter is known"},
    {"better", 0, OPTION_TEXT, false, "WAY", 0, 0, "higher (default) or lower"},
    {NULL, 0, OPTION_FLAG, false, NULL, 0, 0, NULL}};

static const char *const example[] = {
    "terrace fit data_examples/tables/itch_by_dose.csv --curve emax --better lower",
    "",
    "  prints data, likelihood estimates with standard errors and the posterior side by side, and",
    "  writes fit.json and report.html into itch_by_dose-fit/. (The logistic growth curve",
    "  b1 / (1 + exp(b2 - b3 x)) is --curve logistic --fix E0=0 with b1 = Emax, b2 = ED50 / "
    "spread,",
    "  b3 = 1 / spread, so that se(b3) = se(spread) / spread^2.)",
    NULL};

static const char *const files[] = {"fit.json", "report.html", NULL};
static const struct result_files result_files = {"fit", "fit.json", files, false};

struct run {
    struct fit_table *table;
    struct design *design;
    struct analyst *analyst;
    struct analysis analysis;
    bool analysed;
    struct text model;
    const char **fix; /* borrowed words */
    char *path;
    struct outdir *dir;
    struct text json, page, tables, notes;
};

static void run_release(struct run *r)
{
    if (r->analysed)
        analysis_release(&r->analysis);
    analyst_free(r->analyst);
    outdir_free(r->dir);
    design_free(r->design);
    fit_table_free(r->table);
    mem_free(r->fix);
    mem_free(r->path);
    struct text *const texts[] = {&r->model, &r->json, &r->page, &r->tables, &r->notes};
    for (size_t i = 0; i < sizeof texts / sizeof *texts; i++)
        text_release(texts[i]);
}

static bool is_one_of(const char *word, const char *a, const char *b)
{
    return strcmp(word, a) == 0 || strcmp(word, b) == 0;
}

static void check_options(const struct options *o, struct err *e)
{
    const char *endpoint = options_text(o, "endpoint"), *better = options_text(o, "better");
    if (options_has(o, "curve") == options_has(o, "model"))
        err_add(e, STATUS_INPUT, NULL, 0, NULL,
                "a fit needs one of --curve CURVE and --model FILE, and not both");
    if (endpoint && !is_one_of(endpoint, "continuous", "binary"))
        err_add(e, STATUS_INPUT, NULL, 0, NULL, "--endpoint %s: allowed are continuous and binary",
                endpoint);
    if (better && !is_one_of(better, "higher", "lower"))
        err_add(e, STATUS_INPUT, NULL, 0, NULL, "--better %s: allowed are higher and lower",
                better);
}

static struct fit_request request_of(struct run *r, const struct options *o, struct err *e)
{
    struct fit_request q = {.curve = options_text(o, "curve"),
                            .model_file = options_text(o, "model"),
                            .seed = options_number(o, "seed", 1)};
    const char *better = options_text(o, "better");
    q.higher_is_better = !better || strcmp(better, "higher") == 0;
    while (options_each(o, "fix", q.fixes))
        q.fixes++;
    r->fix = mem_new(q.fixes, sizeof *r->fix);
    for (size_t i = 0; i < q.fixes; i++)
        r->fix[i] = options_each(o, "fix", i);
    q.fix = r->fix;
    if (q.model_file && file_read(q.model_file, &r->model, e) == STATUS_OK)
        q.model = &r->model;
    return q;
}

/* All faults of options, table, model and directory in one run. */
static enum status read_inputs(struct run *r, const struct options *o, struct err *e)
{
    check_options(o, e);
    const bool usable = e->status == STATUS_OK;
    const struct fit_request q = request_of(r, o, e);
    const enum status table =
        fit_table_read(&r->table, o->argument[0], usable ? options_text(o, "endpoint") : NULL, e);
    if (table == STATUS_OK && usable && (q.curve || q.model))
        fit_design(&r->design, r->table, &q, &terrace_vocabulary, e);
    r->path = results_path(o, &result_files, o->argument[0]);
    results_open(&r->dir, r->path, o, &result_files, e);
    return e->status;
}

static enum status compute(struct run *r, const struct options *o, struct err *e)
{
    const struct analysis_request q = {.number = 1,
                                       .randomized = r->table->data.observed,
                                       .observed = r->table->data.observed,
                                       .seed = r->design->seed,
                                       .live = true,
                                       .threads = threads_wanted(o)};
    r->analyst = analyst_new(r->design);
    analysis_init(&r->analysis, r->design);
    r->analysed = true;
    return analysis_run(&r->analysis, r->analyst, &r->table->data.by_level, &q, e);
}

static void write_documents(struct run *r)
{
    const struct fit_report f = {
        .r = {.d = r->design, .data = &r->table->data, .a = &r->analysis, .seed = r->design->seed},
        .table = r->table};
    fit_json(&r->json, &f);
    fit_page(&r->page, &f);
    fit_text(&r->tables, &f);
}

static enum status put_documents(struct run *r, const struct options *o, struct err *e)
{
    enum status status = outdir_add(r->dir, "report.html", &r->page, e);
    if (status == STATUS_OK)
        status = outdir_add(r->dir, "fit.json", &r->json, e);
    if (status == STATUS_OK)
        status = results_print(o, &r->json, &r->tables, e);
    return status == STATUS_OK ? outdir_commit(r->dir, e) : status;
}

static enum status run_all(struct run *r, const struct options *o, struct err *e)
{
    if (read_inputs(r, o, e) != STATUS_OK)
        return e->status;
    const enum status status = compute(r, o, e);
    if (status != STATUS_OK && status != STATUS_DISTRUSTED)
        return status;
    write_documents(r);
    /* made before the results are put into place: nothing may fail then */
    text_addf(&r->notes, "Report: %s/report.html", r->path);
    const enum status written = put_documents(r, o, e);
    if (written != STATUS_OK)
        return written;
    if (!options_has(o, "quiet"))
        output_note(text_s(&r->notes));
    if (status == STATUS_DISTRUSTED && e->count == 0)
        err_add(e, status, NULL, 0, NULL,
                "the computation cannot be trusted: the results in %s are not to be used", r->path);
    return status;
}

static enum status run_fit(const struct options *o, const struct terminal *t, struct err *e)
{
    (void)t;
    if (arguments_check(o, &command_fit, command_fit.arguments_needed, e) != STATUS_OK)
        return STATUS_INPUT;
    struct run r = {0};
    const enum status status = run_all(&r, o, e);
    run_release(&r);
    return status;
}

const struct command command_fit = {"fit",
                                    "DATA",
                                    1,
                                    "one curve to one table, no design",
                                    "Reads a table (CSV): rows level,response or groups "
                                    "level,n,mean,sd or level,n,events; fits one\n"
                                    "curve by maximum likelihood and by posterior draws, and "
                                    "writes fit.json and report.html into a\n"
                                    "directory, by default STEM-fit/ with the STEM of DATA. Priors "
                                    "that are not given are made from\n"
                                    "the data.",
                                    example,
                                    own_options,
                                    run_fit};
