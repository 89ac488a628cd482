/* SPDX-License-Identifier: GPL-3.0-or-later */
/* test_report_json.c: analysis.json and draws.csv: shape, nulls, what distrust takes away. */
#include <cjson/cJSON.h>
#include <math.h>
#include <string.h>

#include "analysis/raw_interval.h"
#include "markup_check.h"
#include "report/analysis_json.h"
#include "report/draws_csv.h"
#include "report_fixture.h"
#include "unit.h"

static cJSON *written(enum fixture_kind kind)
{
    struct fixture *f = fixture_new(kind);
    struct text t = TEXT_INIT;
    analysis_json(&t, fixture_report(f));
    CU_ASSERT_PTR_NULL(strstr(text_s(&t), "nan"));
    CU_ASSERT_PTR_NULL(strstr(text_s(&t), "inf"));
    cJSON *tree = cJSON_Parse(text_s(&t));
    CU_ASSERT_PTR_NOT_NULL_FATAL(tree);
    text_release(&t);
    fixture_free(f);
    return tree;
}

/* A member by its path, e.g. "levels/0/raw/mean". */
static const cJSON *at(const cJSON *tree, const char *path)
{
    char part[64];
    while (tree && *path) {
        const size_t n = strcspn(path, "/");
        memcpy(part, path, n);
        part[n] = '\0';
        tree = cJSON_IsArray(tree) ? cJSON_GetArrayItem(tree, part[0] - '0')
                                   : cJSON_GetObjectItemCaseSensitive(tree, part);
        path += n + (path[n] == '/');
    }
    return tree;
}

static double number_at(const cJSON *tree, const char *path)
{
    const cJSON *x = at(tree, path);
    return cJSON_IsNumber(x) ? x->valuedouble : NAN;
}

static const char *string_at(const cJSON *tree, const char *path)
{
    const cJSON *x = at(tree, path);
    return cJSON_IsString(x) ? x->valuestring : "(no string)";
}

static void keys_are(const cJSON *object, const char *const *keys)
{
    const cJSON *x = object ? object->child : NULL;
    for (; *keys; keys++, x = x ? x->next : NULL)
        CU_ASSERT_STRING_EQUAL(x ? x->string : "(missing)", *keys);
    CU_ASSERT_PTR_NULL(x);
}

static void top_level_keys_and_their_order(void)
{
    static const char *const top[] = {"terrace",
                                      "program",
                                      "kind",
                                      "analysis",
                                      "final",
                                      "cut",
                                      "by",
                                      "design",
                                      "data",
                                      "seed",
                                      "levels",
                                      "targets",
                                      "parameters",
                                      "likelihood_fit",
                                      "decisions",
                                      "final_success",
                                      "recommendation",
                                      "diagnostics",
                                      "sensitivity",
                                      NULL};
    static const char *const level[] = {"label",     "value",    "control",    "randomized",
                                        "observed",  "raw",      "response",   "gain",
                                        "pr_target", "pr_meets", "next_share", NULL};
    static const char *const gain[] = {"mean", "sd", "q025", "q50", "q975", "pr_positive", NULL};
    static const char *const target[] = {"selected", "pr_selected", "pr_none", "mcse",
                                         "close",    "imprecise",   NULL};
    static const char *const parameter[] = {"name",
                                            "mean",
                                            "sd",
                                            "q025",
                                            "q50",
                                            "q975",
                                            "rhat",
                                            "ess_bulk",
                                            "ess_tail",
                                            "mcse_mean",
                                            "sd_over_prior_sd",
                                            NULL};
    static const char *const diagnostics[] = {
        "chains",        "draws",   "max_rhat",  "min_ess_bulk", "kish", "second_method",
        "lack_of_fit_p", "trusted", "imprecise", "warnings",     NULL};
    cJSON *tree = written(FIXTURE_ITCH);
    keys_are(tree, top);
    keys_are(at(tree, "levels/0"), level);
    keys_are(at(tree, "levels/1/gain"), gain);
    keys_are(at(tree, "targets/ED90"), target);
    keys_are(at(tree, "parameters/0"), parameter);
    keys_are(at(tree, "diagnostics"), diagnostics);
    cJSON_Delete(tree);
}

static void values_are_those_of_the_analysis(void)
{
    cJSON *tree = written(FIXTURE_ITCH);
    CU_ASSERT_STRING_EQUAL(string_at(tree, "kind"), "analysis");
    CU_ASSERT_EQUAL(number_at(tree, "analysis"), 2);
    CU_ASSERT_EQUAL(number_at(tree, "cut"), 26);
    CU_ASSERT_EQUAL(number_at(tree, "seed"), 20261201);
    CU_ASSERT_EQUAL(number_at(tree, "data/subjects"), 118);
    CU_ASSERT_EQUAL(number_at(tree, "levels/1/response/sd"), 0.31);
    CU_ASSERT_EQUAL(number_at(tree, "levels/0/gain/pr_positive"), 0);
    CU_ASSERT_DOUBLE_EQUAL(number_at(tree, "levels/0/raw/sd"), 2.5, 1e-12);
    CU_ASSERT_STRING_EQUAL(string_at(tree, "targets/ED90/selected"), "20 mg");
    CU_ASSERT_STRING_EQUAL(string_at(tree, "recommendation"), "continue");
    CU_ASSERT_EQUAL(number_at(tree, "diagnostics/second_method/max_difference"), 0.0007);
    cJSON_Delete(tree);
}

static void conditions_say_what_they_compare(void)
{
    cJSON *tree = written(FIXTURE_ITCH);
    CU_ASSERT_STRING_EQUAL(string_at(tree, "decisions/0/join"), "all");
    CU_ASSERT_PTR_NULL(at(tree, "decisions/1/join"));
    CU_ASSERT_STRING_EQUAL(string_at(tree, "decisions/0/conditions/0/target"), "ED90");
    CU_ASSERT_EQUAL(number_at(tree, "decisions/0/conditions/0/threshold"), 0.99);
    CU_ASSERT_STRING_EQUAL(string_at(tree, "decisions/0/conditions/0/side"), "above");
    CU_ASSERT_STRING_EQUAL(string_at(tree, "decisions/1/conditions/0/side"), "below");
    CU_ASSERT_EQUAL(number_at(tree, "decisions/1/conditions/0/gain"), 1);
    CU_ASSERT_TRUE(cJSON_IsFalse(at(tree, "decisions/0/applies")));
    CU_ASSERT_TRUE(cJSON_IsTrue(at(tree, "decisions/0/conditions/1/met")));
    CU_ASSERT_TRUE(cJSON_IsTrue(at(tree, "decisions/0/conditions/1/close")));
    cJSON_Delete(tree);
}

static void absent_numbers_are_null(void)
{
    cJSON *tree = written(FIXTURE_DAYS);
    CU_ASSERT_TRUE(cJSON_IsNull(at(tree, "by")));
    CU_ASSERT_TRUE(cJSON_IsNull(at(tree, "likelihood_fit")));
    CU_ASSERT_TRUE(cJSON_IsNull(at(tree, "levels/0/gain")));
    CU_ASSERT_TRUE(cJSON_IsNull(at(tree, "levels/1/raw/rate")));
    CU_ASSERT_EQUAL(number_at(tree, "levels/1/raw/events"), 0);
    CU_ASSERT_DOUBLE_EQUAL(number_at(tree, "levels/0/raw/rate"), 0.7, 1e-12);
    CU_ASSERT_TRUE(cJSON_IsNull(at(tree, "parameters/3/rhat")));
    CU_ASSERT_TRUE(cJSON_IsNull(at(tree, "diagnostics/lack_of_fit_p")));
    CU_ASSERT_EQUAL(number_at(tree, "data/dropped_as_failure"), 3);
    CU_ASSERT_TRUE(cJSON_IsTrue(at(tree, "levels/5/closed")));
    CU_ASSERT_EQUAL(cJSON_GetArraySize(at(tree, "decisions")), 0);
    CU_ASSERT_PTR_NULL(at(tree, "final_success"));
    cJSON_Delete(tree);
}

static void distrust_takes_every_verdict_away(void)
{
    cJSON *tree = written(FIXTURE_DISTRUSTED);
    CU_ASSERT_TRUE(cJSON_IsFalse(at(tree, "diagnostics/trusted")));
    CU_ASSERT_STRING_EQUAL(string_at(tree, "recommendation"), "undetermined");
    CU_ASSERT_TRUE(cJSON_IsNull(at(tree, "decisions/0/met")));
    CU_ASSERT_TRUE(cJSON_IsNull(at(tree, "decisions/1/met")));
    CU_ASSERT_TRUE(cJSON_IsNull(at(tree, "decisions/0/conditions/1/met")));
    CU_ASSERT_TRUE(cJSON_IsNull(at(tree, "final_success/met")));
    const cJSON *level;
    cJSON_ArrayForEach(level, at(tree, "levels"))
        CU_ASSERT_TRUE(cJSON_IsNull(at(level, "next_share")));
    cJSON_Delete(tree);
}

static void likelihood_fit_has_nine_digits(void)
{
    static const char *const keys[] = {"converged", "message",    "log_likelihood",
                                       "aic",       "parameters", NULL};
    cJSON *tree = written(FIXTURE_MODELS), *failed = written(FIXTURE_FINAL);
    keys_are(at(tree, "likelihood_fit"), keys);
    CU_ASSERT_TRUE(cJSON_IsTrue(at(tree, "likelihood_fit/converged")));
    CU_ASSERT_TRUE(cJSON_IsNull(at(tree, "likelihood_fit/message")));
    CU_ASSERT_EQUAL(number_at(tree, "likelihood_fit/log_likelihood"), -231.212346);
    CU_ASSERT_EQUAL(number_at(tree, "likelihood_fit/aic"), 470.424691);
    CU_ASSERT_EQUAL(number_at(tree, "likelihood_fit/parameters/0/estimate"), 1.23456789);
    CU_ASSERT_TRUE(cJSON_IsNull(at(tree, "likelihood_fit/parameters/3/se")));
    CU_ASSERT_TRUE(cJSON_IsFalse(at(failed, "likelihood_fit/converged")));
    CU_ASSERT_STRING_EQUAL(string_at(failed, "likelihood_fit/message"),
                           "ED50 runs off beyond the levels.");
    CU_ASSERT_TRUE(cJSON_IsNull(at(failed, "likelihood_fit/aic")));
    CU_ASSERT_TRUE(cJSON_IsNull(at(failed, "likelihood_fit/parameters/0/estimate")));
    cJSON_Delete(tree);
    cJSON_Delete(failed);
}

static void sensitivity_models(void)
{
    static const char *const keys[] = {
        "curve",      "order",          "spacing",     "decides",   "trusted",
        "message",    "levels",         "targets",     "decisions", "final_success",
        "parameters", "likelihood_fit", "diagnostics", NULL};
    static const char *const level[] = {"label", "response", "gain", "pr_target", "pr_meets", NULL};
    static const char *const condition[] = {"measure", "target", "gain", "value", "mcse", NULL};
    cJSON *tree = written(FIXTURE_MODELS);
    CU_ASSERT_EQUAL(cJSON_GetArraySize(at(tree, "sensitivity")), 3);
    keys_are(at(tree, "sensitivity/0"), keys);
    keys_are(at(tree, "sensitivity/0/levels/1"), level);
    keys_are(at(tree, "sensitivity/0/decisions/0/conditions/0"), condition);
    CU_ASSERT_TRUE(cJSON_IsFalse(at(tree, "sensitivity/0/decides")));
    CU_ASSERT_STRING_EQUAL(string_at(tree, "sensitivity/0/curve"), "ndlm");
    CU_ASSERT_EQUAL(number_at(tree, "sensitivity/0/diagnostics/lack_of_fit_p"), 0.031);
    CU_ASSERT_EQUAL(number_at(tree, "sensitivity/0/levels/1/response/sd"), 0.31);
    CU_ASSERT_PTR_NULL(at(tree, "sensitivity/1/order"));
    CU_ASSERT_TRUE(cJSON_IsFalse(at(tree, "sensitivity/1/trusted")));
    CU_ASSERT_STRING_EQUAL(string_at(tree, "sensitivity/2/message"),
                           "the posterior may be improper");
    CU_ASSERT_TRUE(cJSON_IsNull(at(tree, "sensitivity/2/levels/1/response/mean")));
    CU_ASSERT_TRUE(cJSON_IsNull(at(tree, "sensitivity/2/levels/1/pr_target/ED90")));
    /* what decides is untouched */
    CU_ASSERT_TRUE(cJSON_IsTrue(at(tree, "diagnostics/trusted")));
    CU_ASSERT_EQUAL(number_at(tree, "diagnostics/lack_of_fit_p"), 0.4);
    cJSON_Delete(tree);
}

static void draws_have_one_row_a_draw(void)
{
    struct fixture *f = fixture_new(FIXTURE_ITCH);
    struct text t = TEXT_INIT;
    draws_csv(&t, fixture_report(f));
    const char *head = "chain,draw,E0,Emax,ED50,sd,response_Placebo,response_5 mg,";
    CU_ASSERT_EQUAL(strncmp(text_s(&t), head, strlen(head)), 0);
    CU_ASSERT_EQUAL(markup_count(text_s(&t), "\n"), 17);
    /* draw 8 of the fixture is the second of chain 1 */
    CU_ASSERT_PTR_NOT_NULL(strstr(text_s(&t), "\n1,2,1,3,5,7,-2,-6,-10,-14,-18,-22\n"));
    text_release(&t);
    fixture_free(f);
}

static void draws_quote_labels(void)
{
    struct fixture *f = fixture_new(FIXTURE_MANY);
    struct text t = TEXT_INIT;
    draws_csv(&t, fixture_report(f));
    CU_ASSERT_PTR_NOT_NULL(strstr(text_s(&t), ",\"response_dose <2> & \"\"x\"\"\","));
    text_release(&t);
    fixture_free(f);
}

/* Wilson (1927): 8 of 10 gives 0.4902 to 0.9433; mean 5, ss 36, n 10 gives 5 -+ 1.96 * 2/sqrt(10).
 */
static void raw_intervals(void)
{
    double n[] = {10, 0, 1}, mean[] = {5, 0, 2}, ss[] = {36, 0, 0}, events[] = {8, 0, 1};
    const struct level_data d = {3, n, n, mean, ss, events};
    struct raw_figures r = raw_interval(&d, ENDPOINT_BINARY, 0);
    CU_ASSERT_DOUBLE_EQUAL(r.low, 0.4902, 5e-5);
    CU_ASSERT_DOUBLE_EQUAL(r.high, 0.9433, 5e-5);
    r = raw_interval(&d, ENDPOINT_BINARY, 2);
    CU_ASSERT_EQUAL(r.high, 1);
    r = raw_interval(&d, ENDPOINT_CONTINUOUS, 0);
    CU_ASSERT_DOUBLE_EQUAL(r.low, 5 - 1.2396, 5e-5);
    CU_ASSERT_EQUAL(r.sd, 2);
    r = raw_interval(&d, ENDPOINT_CONTINUOUS, 1);
    CU_ASSERT_TRUE(isnan(r.mean) && isnan(r.low) && isnan(r.sd));
    r = raw_interval(&d, ENDPOINT_CONTINUOUS, 2);
    CU_ASSERT_TRUE(r.mean == 2 && isnan(r.sd) && isnan(r.high));
}

static const struct unit_test tests[] = {
    {"keys and their order", top_level_keys_and_their_order},
    {"values are those of the analysis", values_are_those_of_the_analysis},
    {"conditions say what they compare", conditions_say_what_they_compare},
    {"absent numbers are null", absent_numbers_are_null},
    {"distrust takes every verdict away", distrust_takes_every_verdict_away},
    {"likelihood fit: nine digits, nulls", likelihood_fit_has_nine_digits},
    {"sensitivity models", sensitivity_models},
    {"draws.csv has one row a draw", draws_have_one_row_a_draw},
    {"draws.csv quotes labels", draws_quote_labels},
    {"raw means, rates and intervals", raw_intervals},
    UNIT_END};

int main(void)
{
    return unit_main("report json", tests);
}
