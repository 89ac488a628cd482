/* SPDX-License-Identifier: GPL-3.0-or-later */
/* fields_table.c: the field table: every field of the design file, once. */
#include <stddef.h>

#include "design/curve.h"
#include "design/design.h"
#include "design/fields.h"
#include "design/fields_limits.h"
#include "design/fields_prior.h"

/* Rows in shorthand; what follows the fixed part are more members, `.help` at least. */
#define TEXT(k, ...)                                          \
    {                                                         \
        .key = (k), .kind = FIELD_TEXT, .low = 1, __VA_ARGS__ \
    }
#define WORD(k, ...)                                \
    {                                               \
        .key = (k), .kind = FIELD_WORD, __VA_ARGS__ \
    }
#define FLAG(k, ...)                                \
    {                                               \
        .key = (k), .kind = FIELD_FLAG, __VA_ARGS__ \
    }
#define NUMBER(k, lo, hi, ...)                                                   \
    {                                                                            \
        .key = (k), .kind = FIELD_NUMBER, .low = (lo), .high = (hi), __VA_ARGS__ \
    }
#define WHOLE(k, lo, hi, ...)                                                   \
    {                                                                           \
        .key = (k), .kind = FIELD_WHOLE, .low = (lo), .high = (hi), __VA_ARGS__ \
    }
#define ANY_NUMBER(k, ...) NUMBER(k, -NUMBER_LIMIT, NUMBER_LIMIT, __VA_ARGS__)
#define POSITIVE(k, ...) NUMBER(k, 0, NUMBER_LIMIT, .low_open = true, __VA_ARGS__)
#define OBJECT(k, rows, ...)                                            \
    {                                                                   \
        .key = (k), .kind = FIELD_OBJECT, .nested = (rows), __VA_ARGS__ \
    }
#define MAP(k, row, ...)                                            \
    {                                                               \
        .key = (k), .kind = FIELD_MAP, .nested = (row), __VA_ARGS__ \
    }
#define LIST(k, row, lo, hi, ...)                                                               \
    {                                                                                           \
        .key = (k), .kind = FIELD_LIST, .nested = (row), .low = (lo), .high = (hi), __VA_ARGS__ \
    }
#define CHOICE(k, rows, ...)                                            \
    {                                                                   \
        .key = (k), .kind = FIELD_CHOICE, .nested = (rows), __VA_ARGS__ \
    }
#define END               \
    {                     \
        .kind = FIELD_END \
    }

enum { LONG_LIST = 10000 };

const char *const field_reserved[] = {"any", "best", "none", NULL};

/* --- levels --- */

static const struct field level_rows[] = {
    TEXT("label", .required = true, .elsewhere = true, .help = "name of the level, unique"),
    ANY_NUMBER("value", .required = true, .unit = "levels.unit",
               .help = "dose or duration; strictly increasing down the list"),
    END,
};
static const struct field level_row[] = {OBJECT(NULL, level_rows, .help = "one level"), END};

static const struct field reference_rows[] = {
    TEXT(NULL, .elsewhere = true, .help = "a label"),
    ANY_NUMBER(NULL, .unit = "response", .help = "a number on the response scale"),
    END,
};

static const char *const quantity_words[] = {"dose", "duration", NULL};

static const struct field levels_rows[] = {
    WORD("quantity", .words = quantity_words, .fallback = "\"dose\"", .help = "what a level is"),
    {.key = "unit", .kind = FIELD_TEXT, .fallback = "\"\"", .help = "unit of the level values"},
    TEXT("control", .elsewhere = true, .help = "label of the control, anywhere in the list"),
    FLAG("control_on_curve", .fallback = "true",
         .when = "false needs a control, which then has its own prior `control`",
         .help = "whether the control lies on the curve"),
    CHOICE("reference", reference_rows, .when = "only without a control",
           .help = "what gains are taken against: a label, or a number (performance goal)"),
    LIST("list", level_row, LEVELS_MIN, LEVELS_MAX, .required = true, .help = "the levels"),
    END,
};

/* --- endpoint --- */

static const char *const type_words[] = {"continuous", "binary", NULL};
static const char *const better_words[] = {"higher", "lower", NULL};
static const char *const dropped_words[] = {"excluded", "failure", NULL};

static const struct field any_number_row[] = {ANY_NUMBER(NULL, .help = "a number"), END};

static const struct field endpoint_rows[] = {
    TEXT("name", .required = true, .help = "what is measured, in words"),
    WORD("type", .words = type_words, .required = true, .help = "kind of response"),
    WORD("better", .words = better_words, .required = true, .help = "which direction is better"),
    NUMBER("observed_after", 0, NUMBER_LIMIT, .fallback = "0", .unit = "time_unit",
           .help = "time from enrolment to the outcome"),
    LIST("range", any_number_row, 2, 2, .unit = "response", .when = "only for continuous",
         .help = "lowest and highest possible response; also the scale of default priors"),
    WORD("dropped", .words = dropped_words, .fallback = "\"excluded\"",
         .when = "failure only for binary", .help = "what a subject that dropped out counts as"),
    END,
};

/* --- model --- */

static const char *const spacing_words[] = {"steps", "actual", NULL};

static const struct field model_rows[] = {
    WORD("curve", .words_from = curve_word, .required = true, .help = "the curve over the levels"),
    {.key = "priors",
     .kind = FIELD_OBJECT,
     .nested_from = prior_rows,
     .fallback = "{}",
     .otherwise = "a default prior for every parameter, from the endpoint's range and the levels",
     .help = "priors by parameter name"},
    ANY_NUMBER("shift", .otherwise = "1 for log_linear", .unit = "levels.unit",
               .when = "only log_linear", .help = "added to a level before the logarithm"),
    WHOLE("order", 1, 2, .otherwise = "1 for ndlm", .when = "only ndlm; 2 needs 3 levels",
          .help = "order of the random walk"),
    WORD("spacing", .words = spacing_words, .otherwise = "steps for ndlm",
         .when = "only ndlm; actual only with order 1",
         .help = "whether the steps of the walk count alike or by the gaps between levels"),
    END,
};
static const struct field model_row[] = {
    OBJECT(NULL, model_rows, .shared = "model", .help = "a model"), END};

/* --- targets --- */

static const char *rule_word(const struct vocabulary *v, size_t i)
{
    return v->rules[i] == NULL ? NULL : v->rules[i]->key;
}

static const char *measure_word(const struct vocabulary *v, size_t i)
{
    return v->measures[i] == NULL ? NULL : v->measures[i]->key;
}

static const char *const scale_words[] = {"response", "link", NULL};

static const struct field select_rows[] = {
    NUMBER("meets", 0, 1, .low_open = true, .high_open = true, .required = true,
           .unit = "probability",
           .help = "select the lowest active level whose pr_meets is at least this"),
    END,
};

static const struct field target_rows[] = {
    WORD("rule", .words_from = rule_word, .required = true, .help = "what the target level is"),
    NUMBER("fraction", 0, 1, .low_open = true, .when = "effective_dose",
           .help = "share of the largest active gain"),
    POSITIVE("effect", .unit = "response", .when = "minimum_effect", .help = "gain to be reached"),
    TEXT("of", .otherwise = "best for within_margin", .when = "within_margin",
         .help = "what the margin is taken to: `best` or a label"),
    POSITIVE("margin", .unit = "response", .when = "within_margin",
             .help = "how much worse is still acceptable"),
    OBJECT("select", select_rows, .help = "how the selected level is chosen"),
    WORD("scale", .words = scale_words, .fallback = "\"response\"", .when = "link only for binary",
         .help = "scale of effect and margin"),
    END,
};
static const struct field target_row[] = {OBJECT(NULL, target_rows, .help = "a target"), END};

/* --- conditions and decisions --- */

static const char *const threshold_keys[] = {"above", "below", NULL};

static const struct field condition_rows[] = {
    WORD("measure", .words_from = measure_word, .required = true, .help = "what is compared"),
    TEXT("target", .when = "measures of a selected level", .help = "name of a target"),
    TEXT("level", .when = "pr_gain, instead of target",
         .help = "label of an active level, or `any`"),
    ANY_NUMBER("gain", .otherwise = "0 for pr_gain and pr_any_gain", .unit = "response",
               .when = "pr_gain, pr_any_gain", .help = "gain to be exceeded"),
    ANY_NUMBER("value", .unit = "response", .when = "pr_response",
               .help = "response to be bettered"),
    WHOLE("per_arm", 1, COUNT_LIMIT, .unit = "subjects", .when = "predictive_next",
          .help = "subjects in each arm of the next trial"),
    NUMBER("alpha", 0, 1, .low_open = true, .high_open = true, .when = "predictive_next",
           .help = "one-sided level of the next trial's test"),
    WORD("scale", .words = scale_words, .otherwise = "response where the measure takes a scale",
         .when = "link only for binary", .help = "scale of gain or value"),
    NUMBER("above", 0, 1, .unit = "probability", .help = "met when the measure is greater"),
    NUMBER("below", 0, 1, .unit = "probability", .help = "met when the measure is less"),
    END,
};
static const struct field condition_row[] = {OBJECT(NULL, condition_rows, .one_of = threshold_keys,
                                                    .shared = "condition", .help = "a condition"),
                                             END};

static const struct field all_rows[] = {
    LIST("all", condition_row, 1, LONG_LIST, .required = true, .help = "every one must be met"),
    END};
static const struct field any_rows[] = {
    LIST("any", condition_row, 1, LONG_LIST, .required = true, .help = "one must be met"), END};

static const struct field conditions_rows[] = {
    OBJECT(NULL, all_rows, .tag = "all", .help = "all of a list of conditions"),
    OBJECT(NULL, any_rows, .tag = "any", .help = "any of a list of conditions"),
    OBJECT(NULL, condition_rows, .one_of = threshold_keys, .shared = "condition",
           .help = "a condition"),
    END,
};

static const char *const action_words[] = {"stop_success", "stop_futility", NULL};

static const struct field decision_rows[] = {
    WORD("action", .words = action_words, .required = true, .help = "what happens when it is met"),
    CHOICE("if", conditions_rows, .required = true, .shared = "conditions",
           .help = "a condition, or all or any of a list"),
    NUMBER("from", 0, NUMBER_LIMIT, .fallback = "0", .unit = "as the planned points",
           .help = "planned point from which it is read"),
    WHOLE("min_observed", 0, COUNT_LIMIT, .fallback = "0", .unit = "subjects",
          .help = "outcomes in hand from which it is read"),
    FLAG("binding", .fallback = "true", .when = "false only for stop_futility",
         .help = "false: shown and simulated, but ignored for error rates"),
    END,
};
static const struct field decision_row[] = {OBJECT(NULL, decision_rows, .help = "a decision"), END};

static const struct field final_rows[] = {
    CHOICE("success", conditions_rows, .required = true, .shared = "conditions",
           .help = "what makes the trial a success at the last analysis"),
    END,
};

/* --- allocation --- */

static const struct field ratio_row[] = {WHOLE(NULL, 1, 1e6, .help = "a share"), END};

static const struct field start_rows[] = {
    WHOLE("per_level", 0, COUNT_LIMIT, .fallback = "0", .unit = "subjects",
          .help = "subjects per level before shares adapt"),
    END,
};

static const char *const power_words[] = {"n/2N", NULL};
static const char *const largest_words[] = {"as_largest", NULL};
static const char *const method_words[] = {"independent", "urn", NULL};

static const struct field power_rows[] = {
    NUMBER(NULL, 0, 1000, .help = "a number"),
    WORD(NULL, .words = power_words, .help = "randomized over twice the subjects"),
    END,
};

static const struct field share_row[] = {NUMBER(NULL, 0, 1, .help = "a share"), END};
static const struct field bound_rows[] = {
    NUMBER(NULL, 0, 1, .help = "a share"),
    MAP(NULL, share_row, .help = "shares by label"),
    END,
};

static const struct field adapt_rows[] = {
    TEXT("target", .required = true, .help = "target whose level probabilities make the shares"),
    CHOICE("power", power_rows, .fallback = "1", .help = "power of the level probability"),
    NUMBER("information", 0, 1000, .fallback = "0",
           .help = "power of the variance over (subjects + 1)"),
    NUMBER("drop_below", 0, 1, .fallback = "0", .help = "smaller shares become 0"),
    CHOICE("at_least", bound_rows, .help = "lower bound of an active level's share"),
    CHOICE("at_most", bound_rows, .help = "upper bound of an active level's share"),
    END,
};

static const struct field control_share_rows[] = {
    NUMBER(NULL, 0, 1, .low_open = true, .high_open = true, .help = "a share"),
    WORD(NULL, .words = largest_words, .help = "as much as the largest active share"),
    END,
};

static const struct field allocation_rows[] = {
    LIST("ratio", ratio_row, LEVELS_MIN, LEVELS_MAX, .otherwise = "equal",
         .help = "fixed shares, one per level in list order"),
    WHOLE("block", 1, COUNT_LIMIT, .otherwise = "the ratio's sum", .unit = "subjects",
          .help = "size of permuted blocks; 1: independent draws"),
    OBJECT("start", start_rows, .fallback = "{}", .help = "the subjects before shares adapt"),
    OBJECT("adapt", adapt_rows, .help = "response-adaptive shares"),
    CHOICE("control_share", control_share_rows, .otherwise = "the control's share of the ratio",
           .when = "with a control and adapt", .help = "the control's adapted share"),
    WORD("method", .words = method_words, .fallback = "\"independent\"",
         .help = "how levels are drawn from adapted shares"),
    NUMBER("urn_mass", 1, NUMBER_LIMIT, .fallback = "4", .when = "acts with method urn",
           .help = "mass of the urn (alpha)"),
    END,
};

/* --- analyses --- */

static const char *const counted_words[] = {"randomized", "observed", "time", NULL};
static const struct field point_row[] = {POSITIVE(NULL, .help = "a planned point"), END};

static const struct field analyses_rows[] = {
    POSITIVE("first_at", .unit = "as counted", .when = "with every, instead of at",
             .help = "first planned point"),
    POSITIVE("every", .unit = "as counted", .when = "with first_at, instead of at",
             .help = "distance of the planned points"),
    LIST("at", point_row, 1, POINTS_MAX, .unit = "as counted",
         .when = "instead of first_at and every", .help = "planned points, increasing"),
    WORD("counted", .words = counted_words, .fallback = "\"observed\"",
         .help = "what planned points count: subjects randomized, outcomes in hand, or time"),
    NUMBER("lag", 0, NUMBER_LIMIT, .fallback = "0", .unit = "time_unit",
           .help = "from the data cut to shares or a stop taking effect"),
    END,
};

/* --- accrual, dropout --- */

static const struct field rate_rows[] = {
    NUMBER("from", 0, NUMBER_LIMIT, .required = true, .unit = "time_unit",
           .help = "start of this rate; the first is 0"),
    NUMBER("rate", 0, NUMBER_LIMIT, .required = true, .unit = "subjects per time_unit",
           .help = "subjects arriving"),
    END,
};
static const struct field rate_row[] = {OBJECT(NULL, rate_rows, .help = "a rate"), END};
static const struct field accrual_rows[] = {
    LIST("rates", rate_row, 1, LONG_LIST, .required = true, .help = "arrival rates"), END};

static const struct field fraction_row[] = {
    NUMBER(NULL, 0, 1, .high_open = true, .help = "a fraction"), END};
static const struct field fraction_rows[] = {
    NUMBER(NULL, 0, 1, .high_open = true, .help = "a fraction"),
    LIST(NULL, fraction_row, LEVELS_MIN, LEVELS_MAX, .help = "one per level"),
    END,
};
static const struct field dropout_rows[] = {
    CHOICE("fraction", fraction_rows, .required = true,
           .help = "share of subjects lost before the outcome: a number, or one per level"),
    END,
};

/* --- scenarios --- */

static const char *const truth_keys[] = {"means", "rates", "curve", "draw", NULL};
static const char *const draw_words[] = {"prior", NULL};
static const struct field true_rate_row[] = {NUMBER(NULL, 0, 1, .help = "a rate"), END};
static const struct field sd_row[] = {POSITIVE(NULL, .help = "a standard deviation"), END};
static const struct field sd_rows[] = {
    POSITIVE(NULL, .help = "a standard deviation"),
    LIST(NULL, sd_row, LEVELS_MIN, LEVELS_MAX, .help = "one per level"),
    END,
};

static const struct field scenario_rows[] = {
    TEXT("name", .required = true, .help = "name of the scenario, unique"),
    LIST("means", any_number_row, LEVELS_MIN, LEVELS_MAX, .unit = "response", .when = "continuous",
         .help = "true mean of every level"),
    LIST("rates", true_rate_row, LEVELS_MIN, LEVELS_MAX, .unit = "probability", .when = "binary",
         .help = "true event rate of every level"),
    WORD("curve", .words_from = curve_word, .when = "with parameters",
         .help = "curve on which the truth lies (binary: on the logit)"),
    {.key = "parameters",
     .kind = FIELD_OBJECT,
     .nested_from = parameter_rows,
     .when = "with curve",
     .help = "true parameters of that curve"},
    ANY_NUMBER("control", .when = "with curve and a control off the curve",
               .help = "true mean (binary: logit) of the control"),
    WORD("draw", .words = draw_words, .help = "a new truth each trial from the model's priors"),
    CHOICE("sd", sd_rows, .unit = "response", .when = "continuous, unless drawn from the prior",
           .help = "true residual standard deviation: a number, or one per level"),
    ANY_NUMBER("trend", .fallback = "0", .unit = "response or logit per time_unit",
               .help = "change of every mean (binary: logit) since opening"),
    FLAG("null", .otherwise = "largest true gain at most 0",
         .help = "whether the scenario counts for error rates"),
    OBJECT("accrual", accrual_rows, .otherwise = "the design's", .shared = "accrual",
           .help = "arrivals in this scenario"),
    OBJECT("dropout", dropout_rows, .otherwise = "the design's", .shared = "dropout",
           .help = "dropout in this scenario"),
    END,
};
static const struct field scenario_row[] = {
    OBJECT(NULL, scenario_rows, .one_of = truth_keys, .help = "a scenario"), END};

/* --- the rest --- */

static const struct field simulation_rows[] = {
    WHOLE("trials", 1, COUNT_LIMIT, .fallback = "1000", .help = "simulated trials per scenario"),
    END,
};

static const struct field mcmc_rows[] = {
    WHOLE("draws", 200, 64000, .multiple_of = 8, .fallback = "1000",
          .help = "posterior draws of a simulated analysis"),
    WHOLE("max_draws", 8000, 2048000, .multiple_of = 8, .fallback = "64000",
          .help = "most posterior draws of a live analysis"),
    NUMBER("precision", 0, 0.5, .low_open = true, .high_open = true, .fallback = "0.005",
           .unit = "probability", .help = "Monte Carlo standard error asked of live probabilities"),
    END,
};

static const struct field column_rows[] = {
    TEXT("subject", .fallback = "\"subject\"", .help = "column of subject identifiers"),
    TEXT("level", .fallback = "\"level\"", .help = "column of levels"),
    TEXT("response", .fallback = "\"response\"", .help = "column of responses"),
    TEXT("enrolled", .fallback = "\"enrolled\"", .help = "column of enrolment times"),
    TEXT("status", .fallback = "\"status\"", .help = "column of statuses"),
    END,
};
static const struct field alias_row[] = {TEXT(NULL, .elsewhere = true, .help = "label of a level"),
                                         END};
static const struct field data_rows[] = {
    OBJECT("columns", column_rows, .fallback = "{}", .help = "column names of the data file"),
    MAP("level_values", alias_row, .fallback = "{}",
        .help = "what stands in the level column, and the label it means"),
    END,
};

static const struct field root_rows[] = {
    TEXT("$schema", .unresolved = true, .help = "address of the JSON Schema"),
    WHOLE("terrace", 1, 1, .required = true, .help = "version of this file format: 1"),
    TEXT("title", .required = true, .help = "title of the trial"),
    OBJECT("levels", levels_rows, .required = true, .help = "the doses or durations studied"),
    TEXT("time_unit", .fallback = "\"day\"",
         .help = "unit of all times; day, week, month and year also serve calendar dates"),
    OBJECT("endpoint", endpoint_rows, .required = true, .help = "the response"),
    OBJECT("model", model_rows, .required = true, .shared = "model",
           .help = "the curve and its priors"),
    LIST("sensitivity", model_row, 0, 100, .fallback = "[]",
         .help = "models refitted beside, deciding nothing"),
    MAP("targets", target_row, .fallback = "{}", .help = "the questions asked, by name"),
    OBJECT("allocation", allocation_rows, .fallback = "{}", .help = "who gets which level"),
    WHOLE("subjects", 1, COUNT_LIMIT, .required = true, .unit = "subjects",
          .help = "subjects randomized when no rule stops the trial"),
    OBJECT("analyses", analyses_rows, .otherwise = "no interim analysis",
           .help = "planned interim analyses"),
    LIST("decisions", decision_row, 0, LONG_LIST, .fallback = "[]",
         .help = "interim decisions, the first that is met acts"),
    OBJECT("final", final_rows, .otherwise = "the last analysis decides nothing",
           .help = "what is decided at the last analysis"),
    OBJECT("accrual", accrual_rows, .when = "needed by simulate", .shared = "accrual",
           .help = "arrivals"),
    OBJECT("dropout", dropout_rows, .fallback = "{\"fraction\": 0}", .shared = "dropout",
           .help = "loss to follow-up"),
    LIST("scenarios", scenario_row, 0, 10000, .when = "needed by simulate", .fallback = "[]",
         .help = "truths to be simulated"),
    OBJECT("simulation", simulation_rows, .fallback = "{}", .help = "the simulation"),
    OBJECT("mcmc", mcmc_rows, .fallback = "{}", .help = "posterior draws"),
    OBJECT("data", data_rows, .fallback = "{}", .help = "how the data file is read"),
    WHOLE("seed", 0, SEED_LIMIT, .fallback = "1", .help = "seed of all random numbers"),
    END,
};

const struct field design_fields = OBJECT(NULL, root_rows, .help = "a design");
