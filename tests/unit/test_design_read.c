/* SPDX-License-Identifier: GPL-3.0-or-later */
/* test_design_read.c: what a sound design becomes: values, defaults, resolved form, hashes. */
#include <CUnit/CUnit.h>
#include <math.h>

#include "analysis/vocabulary_rows.h"
#include "design/design.h"
#include "design_files.h"
#include "unit.h"

#define GOOD "tests/designs/good/"

static struct design *parse(const char *text)
{
    struct err e = ERR_INIT;
    struct design *d;

    design_parse(&d, text, strlen(text), "design.json", &terrace_vocabulary, &e);
    if (e.count > 0) {
        struct text lines = TEXT_INIT;

        err_text(&e, &lines);
        printf("# %s", text_s(&lines));
        text_release(&lines);
    }
    CU_ASSERT_EQUAL(e.count, 0);
    CU_ASSERT_PTR_NOT_NULL_FATAL(d);
    err_release(&e);
    return d;
}

static struct design *read_good(const char *name)
{
    struct text bytes = file_bytes(GOOD, name, ".json");
    struct design *d = parse(text_s(&bytes));

    text_release(&bytes);
    return d;
}

/* A continuous design of three levels with `more` as further members, `levels` inside levels. */
static struct design *small(const char *levels, const char *model, const char *more)
{
    struct text t = TEXT_INIT;
    struct design *d;

    text_addf(&t,
              "{\"terrace\": 1, \"title\": \"t\", \"subjects\": 90, \"levels\": {%s \"list\": ["
              "{\"label\": \"0\", \"value\": 0}, {\"label\": \"10\", \"value\": 10},"
              "{\"label\": \"20\", \"value\": 20}]}, \"endpoint\": {\"name\": \"e\","
              "\"type\": \"continuous\", \"better\": \"lower\", \"range\": [-8, 12]},"
              "\"model\": {%s}%s}",
              levels, model, more);
    d = parse(text_s(&t));
    text_release(&t);
    return d;
}

static bool is_close(double a, double b)
{
    return fabs(a - b) <= 1e-12 * fmax(1, fabs(b));
}

static void itch(void)
{
    struct design *d = read_good("itch");

    CU_ASSERT_STRING_EQUAL(d->title, "Oral agent for chronic itch, dose-ranging");
    CU_ASSERT_EQUAL(d->levels, 6);
    CU_ASSERT_EQUAL(d->control, 0);
    CU_ASSERT_EQUAL(d->reference_level, 0);
    CU_ASSERT(!d->higher_is_better && design_sign(d) < 0 && design_has_gain(d));
    CU_ASSERT_EQUAL(d->model.parameters, 4);
    CU_ASSERT_STRING_EQUAL(d->model.parameter[3]->name, "sd");
    CU_ASSERT_EQUAL(d->model.prior[1].arg[1], 3);
    CU_ASSERT_EQUAL(d->targets, 3);
    CU_ASSERT_EQUAL(d->target[0].fraction, 0.9);
    CU_ASSERT(d->allocation.adapts && d->allocation.adapt_target == 0);
    CU_ASSERT_EQUAL(d->allocation.block, 6);
    CU_ASSERT_EQUAL(d->allocation.control_share, 0.25);
    CU_ASSERT_EQUAL(d->analyses.count, 6); /* 60, 90, ..., 210; 240 is the last analysis */
    CU_ASSERT_EQUAL(d->analyses.at[5], 210);
    CU_ASSERT_FALSE(d->analyses.open_ended);
    CU_ASSERT_EQUAL(d->decision[1].action, ACTION_STOP_FUTILITY);
    CU_ASSERT_EQUAL(d->decision[0].from, 120);
    CU_ASSERT_FALSE(d->decision[1].when.list[0].above);
    CU_ASSERT_EQUAL(d->final_success.list[0].threshold, 0.975);
    CU_ASSERT_EQUAL(d->dropout[5], 0.1);
    CU_ASSERT(d->scenario[0].is_null && !d->scenario[1].is_null);
    CU_ASSERT(is_close(d->scenario[1].response[5], -1 - 2.4 * 80 / 88));
    CU_ASSERT_EQUAL(d->scenario[1].sd[3], 2.6);
    CU_ASSERT_EQUAL(d->seed, 20261201);
    design_free(d);
}

static void antibiotic(void)
{
    struct design *d = read_good("antibiotic_days");
    const struct scenario *curve = &d->scenario[1];

    CU_ASSERT_EQUAL(d->type, ENDPOINT_BINARY);
    CU_ASSERT_EQUAL(d->dropped, DROPPED_FAILURE);
    CU_ASSERT_EQUAL(d->control, LEVEL_NONE);
    CU_ASSERT_EQUAL(d->reference_level, 3);
    CU_ASSERT(d->model.spacing_actual && d->model.order == 1);
    CU_ASSERT_EQUAL(d->model.parameters, 2);
    CU_ASSERT(d->model.prior[1].on_variance);
    CU_ASSERT(d->target[0].of == 3 && d->target[1].of == OF_BEST && d->target[1].link);
    CU_ASSERT(d->target[0].by_meets && d->target[0].meets == 0.9);
    CU_ASSERT_EQUAL(d->allocation.power_kind, POWER_N_OVER_2N);
    CU_ASSERT(d->allocation.at_least[2] == 0.1 && d->allocation.at_most[2] == 1);
    CU_ASSERT_EQUAL(d->allocation.at_most[3], 0.4);
    CU_ASSERT_EQUAL(d->allocation.control_kind, CONTROL_SHARE_NONE);
    CU_ASSERT(d->allocation.urn && d->allocation.urn_mass == 8);
    CU_ASSERT_EQUAL(d->decision[0].when.join, JOIN_ALL);
    CU_ASSERT_EQUAL(d->decision[0].when.count, 2);
    CU_ASSERT_EQUAL(d->decision[1].when.list[0].level, LEVEL_ANY);
    CU_ASSERT_FALSE(d->decision[1].binding);
    /* 40 by time 10, none to 12, then 8 a day: 400 are reached at 12 + 360 / 8 = 57 */
    CU_ASSERT(d->analyses.open_ended);
    CU_ASSERT_EQUAL(d->analyses.count, 12); /* 12, 16, ..., 56 */
    CU_ASSERT_EQUAL(d->analyses.at[11], 56);
    /* logit -2 + 4 x 3 / (3 + 3) = 0 */
    CU_ASSERT(is_close(curve->response[0], 0.5));
    CU_ASSERT_PTR_NULL(curve->sd);
    CU_ASSERT_EQUAL(curve->trend, -0.01);
    CU_ASSERT_EQUAL(d->scenario[2].kind, TRUTH_PRIOR);
    CU_ASSERT_EQUAL(d->scenario[2].accrual.count, 1);
    CU_ASSERT_EQUAL(d->scenario[2].dropout[1], 0);
    CU_ASSERT_STRING_EQUAL(d->columns.response, "CURED");
    CU_ASSERT_STRING_EQUAL(d->columns.level, "level");
    CU_ASSERT(d->aliases == 2 && d->alias[1].level == 1);
    CU_ASSERT_EQUAL(d->seed, 9007199254740991U);
    design_free(d);
}

static void off_curve(void)
{
    struct design *d = read_good("off_curve");
    double value[LEVELS_MAX];

    CU_ASSERT_EQUAL(design_curve_levels(d, &d->model, value).count, 3);
    CU_ASSERT_EQUAL(value[0], 10);
    CU_ASSERT_EQUAL(d->model.parameters, 6);
    CU_ASSERT_EQUAL(d->model.parameter[4]->role, ROLE_CONTROL);
    CU_ASSERT_EQUAL(d->model.parameter[5]->role, ROLE_RESIDUAL);
    CU_ASSERT(d->model.prior[5].on_variance);
    CU_ASSERT_EQUAL(d->model.prior[2].above, 0);
    CU_ASSERT_EQUAL(d->sensitivities, 6);
    CU_ASSERT_EQUAL(d->sensitivity[1].shift, 0.5);
    CU_ASSERT_EQUAL(d->sensitivity[5].order, 2);
    CU_ASSERT_EQUAL(d->sensitivity[5].parameters, 5); /* theta, slope, drift_sd, control, sd */
    CU_ASSERT_EQUAL(d->allocation.control_kind, CONTROL_SHARE_AS_LARGEST);
    CU_ASSERT_EQUAL(d->allocation.at_least[3], 0);
    CU_ASSERT_EQUAL(d->analyses.count, 3); /* of 40, 60, 80, 95 with 90 subjects */
    CU_ASSERT_EQUAL(d->scenario[0].response[0], 0);
    CU_ASSERT_EQUAL(d->scenario[0].sd[3], 5);
    design_free(d);
}

static void performance_goal(void)
{
    struct design *d = read_good("goal");

    CU_ASSERT(d->has_reference_number && design_has_gain(d));
    CU_ASSERT_EQUAL(d->reference_number, 2.5);
    CU_ASSERT_EQUAL(d->reference_level, LEVEL_NONE);
    CU_ASSERT(design_is_active(d, 0));
    CU_ASSERT(d->scenario[0].is_null && !d->scenario[0].null_given);
    CU_ASSERT_FALSE(d->scenario[1].is_null);
    design_free(d);
}

/* Range -8 to 12: A = 5, C = 2. */
static void default_priors(void)
{
    struct design *d =
        small("\"control\": \"0\", \"control_on_curve\": false,", "\"curve\": \"independent\"", "");

    CU_ASSERT_STRING_EQUAL(d->model.parameter[1]->name, "control");
    CU_ASSERT_STRING_EQUAL(d->model.prior[1].family->key, "normal");
    CU_ASSERT(d->model.prior[1].arg[0] == 2 && d->model.prior[1].arg[1] == 5);
    CU_ASSERT_STRING_EQUAL(d->model.prior[2].family->key, "half_normal");
    CU_ASSERT_EQUAL(d->model.prior[2].arg[0], 5);
    CU_ASSERT_PTR_NOT_NULL(
        strstr(text_s(&d->resolved), "\"control\":{\"normal\":{\"mean\":2,\"sd\":5}}"));
    CU_ASSERT_PTR_NOT_NULL(strstr(text_s(&d->resolved), "\"sd\":{\"half_normal\":{\"sd\":5}}"));
    design_free(d);
    d = read_good("minimal_binary"); /* A = 1.5, C = 0 on the logit; 4 levels */
    CU_ASSERT(d->model.prior[0].arg[0] == 0 && d->model.prior[0].arg[1] == 1.5);
    CU_ASSERT(is_close(d->model.prior[1].arg[0], 1.5 / sqrt(3)));
    design_free(d);
}

static void other_defaults(void)
{
    struct design *d = read_good("minimal");

    CU_ASSERT_STRING_EQUAL(d->quantity, "dose");
    CU_ASSERT_STRING_EQUAL(d->time_unit, "day");
    CU_ASSERT(d->control_on_curve && d->observed_after == 0);
    CU_ASSERT_EQUAL(d->dropped, DROPPED_EXCLUDED);
    CU_ASSERT(d->targets == 0 && d->decisions == 0 && d->scenarios == 0 && !d->has_final);
    CU_ASSERT(d->allocation.ratio[2] == 1 && d->allocation.block == 3);
    CU_ASSERT(is_close(d->allocation.control_share, 1.0 / 3));
    CU_ASSERT_EQUAL(d->analyses.count, 0);
    CU_ASSERT(d->trials == 1000 && d->draws == 1000 && d->max_draws == 64000);
    CU_ASSERT(d->precision == 0.005 && d->seed == 1);
    CU_ASSERT_EQUAL(d->dropout[0], 0);
    CU_ASSERT_STRING_EQUAL(d->columns.subject, "subject");
    design_free(d);
}

static void priors_as_given(void)
{
    struct design *d =
        small("",
              "\"curve\": \"emax\", \"priors\": {\"variance\": {\"fixed\": {\"value\": 9}},"
              "\"ED50\": {\"lognormal\": {\"meanlog\": 1, \"sdlog\": 1, \"above\": 0}}}",
              "");

    CU_ASSERT(prior_is_fixed(&d->model.prior[3]));
    CU_ASSERT_EQUAL(d->model.prior[3].arg[0], 3); /* as a standard deviation */
    CU_ASSERT_FALSE(d->model.prior[3].on_variance);
    CU_ASSERT_FALSE(prior_is_truncated(&d->model.prior[2])); /* a cut at 0 cuts nothing off */
    CU_ASSERT_PTR_NOT_NULL(strstr(text_s(&d->resolved), "\"variance\":{\"fixed\":{\"value\":9}}"));
    design_free(d);
}

static size_t points_of(const char *analyses, const char *more)
{
    struct text t = TEXT_INIT;
    struct design *d;
    size_t count;

    text_addf(&t, ", \"analyses\": {%s}%s", analyses, more);
    d = small("", "\"curve\": \"emax\"", text_s(&t));
    count = d->analyses.count;
    design_free(d);
    text_release(&t);
    return count;
}

static void planned_points(void)
{
    static const char accrual[] = ", \"accrual\": {\"rates\": [{\"from\": 0, \"rate\": 3}]}";

    CU_ASSERT_EQUAL(points_of("\"first_at\": 30, \"every\": 30", ""), 2); /* 90 is not held */
    CU_ASSERT_EQUAL(points_of("\"first_at\": 30, \"every\": 29", ""), 3);
    CU_ASSERT_EQUAL(points_of("\"first_at\": 90, \"every\": 1", ""), 0);
    CU_ASSERT_EQUAL(points_of("\"at\": [89, 90, 91]", ""), 1);
    /* 90 subjects at 3 a day are enrolled at day 30 */
    CU_ASSERT_EQUAL(points_of("\"first_at\": 10, \"every\": 10, \"counted\": \"time\"", accrual),
                    2);
    CU_ASSERT_EQUAL(points_of("\"first_at\": 10, \"every\": 10, \"counted\": \"time\"", ""), 0);
    CU_ASSERT_EQUAL(points_of("\"at\": [10.5, 300], \"counted\": \"time\"", accrual), 2);
}

static void resolved_form(void)
{
    struct file_list list = files_in(GOOD, ".json");

    CU_ASSERT(list.count >= 6);
    for (size_t i = 0; i < list.count; i++) {
        struct design *d = read_good(list.name[i]), *again = parse(text_s(&d->resolved));

        CU_ASSERT_STRING_EQUAL(text_s(&again->resolved), text_s(&d->resolved));
        CU_ASSERT_STRING_EQUAL(again->resolved_sha256, d->resolved_sha256);
        CU_ASSERT_STRING_NOT_EQUAL(again->sha256, d->sha256);
        CU_ASSERT_PTR_NULL(strstr(text_s(&d->resolved), "\"note\""));
        CU_ASSERT_PTR_NULL(strstr(text_s(&d->resolved), "$schema"));
        design_free(d);
        design_free(again);
    }
    files_release(&list);
}

/* Notes, order, white space and defaults written out change the file's hash only. */
static void resolved_hash(void)
{
    struct design *a = small("", "\"curve\": \"emax\"", "");
    struct design *b = small("\"note\": \"n\", \"quantity\": \"dose\",",
                             "\"priors\": {\"note\": \"none\"}, \"curve\": \"emax\"",
                             ",\n \"seed\": 1.0, \"allocation\": {\"block\": 3}");
    struct design *c = small("", "\"curve\": \"emax\"", ", \"seed\": 2");

    CU_ASSERT_STRING_EQUAL(a->resolved_sha256, b->resolved_sha256);
    CU_ASSERT_STRING_NOT_EQUAL(a->sha256, b->sha256);
    CU_ASSERT_STRING_NOT_EQUAL(a->resolved_sha256, c->resolved_sha256);
    design_free(a);
    design_free(b);
    design_free(c);
}

static const struct unit_test tests[] = {
    {"continuous design of the interface", itch},
    {"binary design by duration", antibiotic},
    {"control off the curve", off_curve},
    {"performance goal", performance_goal},
    {"default priors", default_priors},
    {"other defaults", other_defaults},
    {"priors as given", priors_as_given},
    {"planned points that are held", planned_points},
    {"the resolved form reads back as itself", resolved_form},
    {"the resolved hash ignores notes and defaults written out", resolved_hash},
    UNIT_END};

int main(void)
{
    return unit_main("design read", tests);
}
