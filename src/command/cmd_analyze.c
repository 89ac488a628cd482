/* SPDX-License-Identifier: GPL-3.0-or-later */
/* cmd_analyze.c: `terrace analyze`: one interim or final analysis of real data. */
#include <math.h>
#include <stdio.h>

#include "analysis/analysis.h"
#include "analysis/vocabulary_rows.h"
#include "base/csv_read.h"
#include "base/mem.h"
#include "command/command.h"
#include "command/results.h"
#include "design/data.h"
#include "design/design.h"
#include "report/analysis_json.h"
#include "report/analysis_page.h"
#include "report/analysis_text.h"
#include "report/draws_csv.h"

enum { ANALYSES_MOST = 10000 };

static const struct option own_options[] = {
    {"analysis", 0, OPTION_WHOLE, false, "K", 1, ANALYSES_MOST,
     "which planned analysis this is (default: the planned points the data reached)"},
    {"final", 0, OPTION_FLAG, false, NULL, 0, 0, "the last analysis"},
    {"cut", 0, OPTION_TEXT, false, "TIME", 0, 0,
     "data cut, a number or a date as in the data (default: the latest time in the data)"},
    {"close", 0, OPTION_TEXT, true, "LABEL", 0, 0,
     "this level is closed: it keeps its data and gets no more subjects"},
    {"pending-ok", 0, OPTION_FLAG, false, NULL, 0, 0,
     "with --final: analyse although outcomes are pending"},
    {"draws", 0, OPTION_FLAG, false, NULL, 0, 0, "write the posterior draws to draws.csv"},
    {"by", 0, OPTION_TEXT, false, "NAME", 0, 0, "who made this analysis, for the report"},
    {NULL, 0, OPTION_FLAG, false, NULL, 0, 0, NULL}};

static const char *const example[] = {
    "terrace analyze data_examples/itch/design.json data_examples/itch/interim.csv", "",
    "  reads the design and the interim data, prints the level probabilities, decisions and next",
    "  shares, and writes analysis.json and report.html into interim-analyze/", NULL};

static const char *const files[] = {"analysis.json", "report.html", "draws.csv", NULL};
static const struct result_files result_files = {"analyze", "analysis.json", files, true};

/* Everything one run holds; released whole, half-built or not. */
struct run {
    struct design *design;
    struct data *data;
    struct analyst *analyst;
    struct analysis analysis;
    struct analysis_request request;
    bool analysed;
    bool *closed;
    char *path;
    struct outdir *dir;
    struct text json, page, draws, tables, notes;
};

static void run_release(struct run *r)
{
    if (r->analysed) {
        analysis_release(&r->analysis);
    }
    analyst_free(r->analyst);
    outdir_free(r->dir);
    data_free(r->data);
    design_free(r->design);
    mem_free(r->closed);
    mem_free(r->path);
    text_release(&r->json);
    text_release(&r->page);
    text_release(&r->draws);
    text_release(&r->tables);
    text_release(&r->notes);
}

/* Without a usable design the data can only be read as a table; its faults are still told. */
static void look_at_table(const char *path, struct err *e)
{
    struct text bytes = TEXT_INIT;
    struct csv_table table = CSV_TABLE_INIT;
    if (file_read(path, &bytes, e) == STATUS_OK) {
        csv_read(text_s(&bytes), bytes.length, path, &table, e);
    }
    csv_table_release(&table);
    text_release(&bytes);
}

static void read_closed(struct run *r, const struct options *o, struct err *e)
{
    const struct design *d = r->design;
    r->closed = mem_new(d->levels, sizeof *r->closed);
    const char *label;
    for (size_t i = 0; (label = options_each(o, "close", i)) != NULL; i++) {
        int level = design_level_find(d, label);
        if (level < 0) {
            err_add(e, STATUS_INPUT, d->file, 0, "/levels/list",
                    "--close %s: the design has no level of this label", label);
        } else if (level == d->control) {
            err_add(e, STATUS_INPUT, d->file, 0, "/levels/control",
                    "--close %s: the control cannot be closed", label);
        } else {
            r->closed[level] = true;
        }
    }
    for (size_t k = 0; k < d->levels; k++) {
        if (design_is_active(d, k) && !r->closed[k]) {
            return;
        }
    }
    err_add(e, STATUS_INPUT, NULL, 0, NULL, "--close: at least one active level must stay open");
}

static void check_options(const struct options *o, struct err *e)
{
    if (options_has(o, "analysis") && options_has(o, "final")) {
        err_add(e, STATUS_INPUT, NULL, 0, NULL, "--analysis and --final exclude each other");
    }
    const char *by = options_text(o, "by");
    for (; by && *by; by++) {
        if ((unsigned char)*by < 0x20 || *by == 0x7f) {
            err_add(e, STATUS_INPUT, NULL, 0, NULL, "--by: control characters are not allowed");
            return;
        }
    }
}

static void read_data(struct run *r, const struct options *o, struct err *e)
{
    const struct design *d = r->design;
    if (data_read(&r->data, o->argument[1], d, options_text(o, "cut"), e) != STATUS_OK) {
        return;
    }
    r->request.final = options_has(o, "final");
    data_analysis_number(r->data, d, (long)options_number(o, "analysis", 0), r->request.final,
                         options_has(o, "pending-ok"), &r->request.number, &r->request.point, e);
}

/* Reads and checks everything, so that all faults are told in one run. */
static enum status read_inputs(struct run *r, const struct options *o, struct err *e)
{
    check_options(o, e);
    if (design_read(&r->design, o->argument[0], &terrace_vocabulary, e) == STATUS_OK) {
        if (options_has(o, "seed")) {
            r->design->seed = (uint64_t)options_number(o, "seed", 0);
        }
        read_closed(r, o, e);
        read_data(r, o, e);
    } else {
        look_at_table(o->argument[1], e);
    }
    r->path = results_path(o, &result_files, o->argument[1]);
    results_open(&r->dir, r->path, o, &result_files, e);
    return e->status;
}

static enum status compute(struct run *r, const struct options *o, struct err *e)
{
    const struct design *d = r->design;
    struct analysis_request *q = &r->request;
    q->closed = r->closed;
    q->randomized = (double)r->data->subjects;
    q->adapted = d->allocation.start_per_level * (double)d->levels <= q->randomized;
    q->observed = r->data->observed;
    q->seed = d->seed;
    q->live = true;
    q->threads = threads_wanted(o);
    r->analyst = analyst_new(d);
    analysis_init(&r->analysis, d);
    r->analysed = true;
    return analysis_run(&r->analysis, r->analyst, &r->data->by_level, q, e);
}

static void write_documents(struct run *r, const struct options *o)
{
    struct analysis_report report = {.d = r->design,
                                     .data = r->data,
                                     .a = &r->analysis,
                                     .by = options_text(o, "by"),
                                     .seed = r->request.seed};
    analysis_json(&r->json, &report);
    analysis_page(&r->page, &report);
    analysis_text(&r->tables, &report);
    if (options_has(o, "draws")) {
        report.draws = analyst_draws(r->analyst);
        draws_csv(&r->draws, &report);
    }
}

/* Standard output is written before the files are renamed into place, so that a full disk behind
 * it leaves no result that looks finished. */
static enum status put_documents(struct run *r, const struct options *o, struct err *e)
{
    enum status status = outdir_add(r->dir, "report.html", &r->page, e);
    if (status == STATUS_OK && options_has(o, "draws")) {
        status = outdir_add(r->dir, "draws.csv", &r->draws, e);
    }
    if (status == STATUS_OK) {
        status = outdir_add(r->dir, "analysis.json", &r->json, e);
    }
    if (status == STATUS_OK) {
        status = results_print(o, &r->json, &r->tables, e);
    }
    return status == STATUS_OK ? outdir_commit(r->dir, e) : status;
}

/* What is told at the end, made before the results are put into place: nothing may fail then. */
static void prepare_notes(struct run *r)
{
    for (size_t i = 0; i < r->data->warnings; i++) {
        text_addf(&r->notes, "warning: %s\n", r->data->warning[i]);
    }
    text_addf(&r->notes, "Report: %s/report.html", r->path);
}

static void tell_progress(const struct run *r, const struct terminal *t)
{
    if (t->progress) {
        char line[96];
        snprintf(line, sizeof line, "%zu subjects read, computing the posterior ...",
                 r->data->subjects);
        output_note(line);
    }
}

static enum status run_all(struct run *r, const struct options *o, const struct terminal *t,
                           struct err *e)
{
    if (read_inputs(r, o, e) != STATUS_OK) {
        return e->status;
    }
    tell_progress(r, t);
    enum status status = compute(r, o, e);
    if (status != STATUS_OK && status != STATUS_DISTRUSTED) {
        return status;
    }
    write_documents(r, o);
    prepare_notes(r);
    enum status written = put_documents(r, o, e);
    if (written != STATUS_OK) {
        return written;
    }
    if (!options_has(o, "quiet")) {
        output_note(text_s(&r->notes));
    }
    if (status == STATUS_DISTRUSTED && e->count == 0) {
        err_add(e, status, NULL, 0, NULL,
                "the computation cannot be trusted: the results in %s are not to be used", r->path);
    }
    return status;
}

static enum status run_analyze(const struct options *o, const struct terminal *t, struct err *e)
{
    if (arguments_check(o, &command_analyze, command_analyze.arguments_needed, e) != STATUS_OK) {
        return STATUS_INPUT;
    }
    struct run r = {0};
    enum status status = run_all(&r, o, t, e);
    run_release(&r);
    return status;
}

const struct command command_analyze = {
    "analyze",
    "DESIGN DATA",
    2,
    "one interim or final analysis of real data",
    "Reads a design (JSON) and the data at a cut (CSV), computes the posterior, the probability\n"
    "that each level is each target, the decisions and the next allocation, and writes\n"
    "analysis.json and report.html (readable by their owner only) into a directory, by default\n"
    "STEM-analyze/ with the STEM of DATA.",
    example,
    own_options,
    run_analyze};
