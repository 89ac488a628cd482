/* SPDX-License-Identifier: GPL-3.0-or-later */
/* design_messages.h: every sentence that a wrong design can earn: what is wrong, what is allowed.
 *
 * One macro, one message. The place (file and JSON pointer) is added by the reader.
 */
#ifndef TERRACE_DESIGN_MESSAGES_H
#define TERRACE_DESIGN_MESSAGES_H

/* One field: type, range, known keys, one-of (also in the JSON Schema). */
#define MSG_TYPE "must be %s, not %s"
#define MSG_WHOLE "must be a whole number, not %s"
#define MSG_RANGE "%s is out of range; it must be %s"
#define MSG_MULTIPLE "%s is not a multiple of %s"
#define MSG_EMPTY "must not be empty"
#define MSG_CONTROL "must not contain control characters (line ends, tabs, escapes)"
#define MSG_RESERVED "\"%s\" cannot be a label: any, best and none have a meaning of their own"
#define MSG_WORD "\"%s\" is not known here; allowed: %s"
#define MSG_WORD_NEAR "\"%s\" is not known here; did you mean \"%s\"? Allowed: %s"
#define MSG_KEY "unknown key \"%s\"; known here: %s"
#define MSG_KEY_NEAR "unknown key \"%s\"; did you mean \"%s\"?"
#define MSG_MISSING "\"%s\" is missing: %s"
#define MSG_COUNT "the number of entries is %zu; it must be %s"
#define MSG_ONE_OF "exactly one of %s must be given, not %s"

/* Levels. */
#define MSG_ORDER "level values must increase strictly: %s follows %s"
#define MSG_LABEL_TWICE "label \"%s\" stands twice; labels must be unique"
#define MSG_LABEL "there is no level \"%s\"; levels: %s"
#define MSG_LABEL_NEAR "there is no level \"%s\"; did you mean \"%s\"?"
#define MSG_OFF_CURVE \
    "control_on_curve is false, but no control is named; give levels.control or leave it out"
#define MSG_TWO_REFERENCES \
    "gains are taken against the control; a reference may be given only without a control"
#define MSG_REFERENCE_RATE "the reference of a binary endpoint is a rate between 0 and 1, not %s"

/* Endpoint. */
#define MSG_RANGE_ORDER "the range must run from low to high: %s is not below %s"
#define MSG_RANGE_BINARY "a binary endpoint has no range; its responses are 0 and 1"
#define MSG_DROPPED "dropped: failure needs a binary endpoint; for a continuous one it is excluded"
#define MSG_OUTSIDE "%s lies outside the endpoint's range, %s to %s"

/* Model and priors. */
#define MSG_CURVE_KEY "\"%s\" belongs to curve %s, not to %s"
#define MSG_ORDER_2 "order 2 needs at least 3 levels on the curve, not %zu"
#define MSG_SPACING "spacing actual goes with order 1; with order 2 every step counts alike"
#define MSG_FEW_LEVELS "a curve needs at least 2 levels, and only %zu lie on it"
#define MSG_CURVE_LEVELS "curve %s does not suit these levels: %s"
#define MSG_PRIOR_NAME "%s has no parameter \"%s\" here; its parameters: %s"
#define MSG_PRIOR_TWICE "\"%s\" and \"%s\" are one number; give one of the two priors"
#define MSG_PRIOR_MISSING \
    "a prior for \"%s\" must be given: a continuous endpoint without a range has no default scale"
#define MSG_PRIOR_NEGATIVE                                                                     \
    "\"%s\" is positive, and this prior has mass below 0; add \"above\": 0 or choose another " \
    "family"
#define MSG_PRIOR_FIXED "\"%s\" cannot be fixed at %s; it must be %s"
#define MSG_PRIOR_UNIFORM "min must be below max: %s is not below %s"
#define MSG_PRIOR_BOUNDS "above must be less than below: %s is not less than %s"
#define MSG_PRIOR_NO_MASS "above and below leave this prior without mass"

/* Targets, conditions, decisions. */
#define MSG_ARG_NOT_TAKEN "%s takes no \"%s\"; it takes %s"
#define MSG_ARG_MISSING "%s needs \"%s\""
#define MSG_NO_GAIN "%s needs gains: name a control in levels.control or give levels.reference"
#define MSG_NO_REFERENCE_LEVEL \
    "%s compares with a level: name levels.control, or a label in levels.reference"
#define MSG_TARGET "there is no target \"%s\"; targets: %s"
#define MSG_TARGET_NEAR "there is no target \"%s\"; did you mean \"%s\"?"
#define MSG_NOT_ACTIVE "\"%s\" is the control; an active level is needed here"
#define MSG_LINK "a continuous endpoint has no link scale; leave scale out"
#define MSG_FRACTION \
    "%s is impossible on the response scale of a binary endpoint; it must lie between %s and %s"
#define MSG_ONE_SUBJECT "%s needs exactly one of \"target\" and \"level\""
#define MSG_BINDING "only stop_futility can be non-binding; %s always binds"

/* Allocation. */
#define MSG_PER_LEVEL "the number of entries is %zu; one for each of the %zu levels is needed"
#define MSG_BLOCK "block %s must be 1 or a multiple of the ratio's sum, %s"
#define MSG_START "%s per level for %zu levels is more than the %s subjects"
#define MSG_LEAST_SUM \
    "at_least asks for %s in all over the active levels; more than 1 is impossible"
#define MSG_MOST_SUM "at_most allows %s in all over the active levels; less than 1 is impossible"
#define MSG_LEAST_MOST "at_least %s of \"%s\" exceeds its at_most %s"
#define MSG_SHARE_CONTROL "control_share needs a control, and levels.control names none"
#define MSG_SHARE_ADAPT \
    "control_share acts on adapted shares; without adapt give the control's share by ratio"

/* Analyses, accrual, dropout, data. */
#define MSG_POINTS "give either first_at with every, or at alone"
#define MSG_INCREASING "must increase: %s follows %s"
#define MSG_WHOLE_POINT "analyses counted by %s come at whole numbers of subjects, not %s"
#define MSG_MANY_POINTS "%s planned analyses are too many; at most %d are allowed"
#define MSG_FIRST_FROM "the first rate must hold from 0, not from %s"
#define MSG_LAST_RATE "the last rate holds to the end of enrolment and must be above 0"
#define MSG_COLUMN_TWICE "column \"%s\" is named for both %s and %s"

/* Scenarios. */
#define MSG_SCENARIO_TWICE "scenario name \"%s\" stands twice; names must be unique"
#define MSG_MEANS_BINARY "a binary endpoint has rates, not means"
#define MSG_RATES_CONTINUOUS "a continuous endpoint has means, not rates"
#define MSG_SCENARIO_KEY "\"%s\" goes with \"%s\", which is not given"
#define MSG_SCENARIO_NEEDS "a scenario with \"%s\" needs \"%s\""
#define MSG_NO_FORMULA \
    "curve %s has no formula to take a truth from; give means or rates, or one of: %s"
#define MSG_PARAMETER "curve %s has no parameter \"%s\"; its parameters: %s"
#define MSG_PARAMETER_MISSING "parameter \"%s\" of curve %s is missing"
#define MSG_PARAMETER_POSITIVE "\"%s\" must be greater than 0, not %s"
#define MSG_SD_MISSING "a continuous endpoint needs \"sd\": a number, or one per level"
#define MSG_SD_BINARY "a binary endpoint has no sd"
#define MSG_SD_DRAW "the prior draws sd with the other parameters; leave sd out"
#define MSG_NO_OFF_CONTROL "the control lies on the curve; \"control\" is for one off the curve"
#define MSG_NOT_FINITE "the truth at level \"%s\" is not a finite number"

/* What this version cannot analyze (design_check_analysable). */

#endif
