/* SPDX-License-Identifier: GPL-3.0-or-later */
/* fit_messages.h: every sentence that a wrong table or model of `fit` can earn. */
#ifndef TERRACE_FIT_MESSAGES_H
#define TERRACE_FIT_MESSAGES_H

#define FIT_MSG_COLUMNS                                                                           \
    "the header must have level,response (rows), level,n,mean,sd or level,n,events (groups); it " \
    "has: %s"
#define FIT_MSG_BOTH \
    "the header has response and n: give rows (level,response) or groups (level,n,...), not both"
#define FIT_MSG_MEAN_AND_EVENTS "the header has mean and events: a table has one endpoint"
#define FIT_MSG_ENDPOINT "--endpoint %s does not suit the column \"%s\""
#define FIT_MSG_NO_ROWS "there is a header but no row"
#define FIT_MSG_LEVEL "the level \"%s\" is not a number within +-1e100"
#define FIT_MSG_RESPONSE \
    "the response \"%s\" is not a number within +-1e100; leave it empty if unknown"
#define FIT_MSG_BINARY "the response %s of a binary endpoint must be 0 or 1"
#define FIT_MSG_N "n \"%s\" must be a whole number from 0 to 1000000000"
#define FIT_MSG_MEAN "the mean \"%s\" is not a number within +-1e100"
#define FIT_MSG_SD "sd \"%s\" must be a number from 0 to 1e100 (empty only where n is 0 or 1)"
#define FIT_MSG_EVENTS "events \"%s\" must be a whole number from 0 to n"
#define FIT_MSG_TWICE "level %s stands on line %ld already; a group has one row"
#define FIT_MSG_FEW "a fit needs 2 levels or more; this table has %zu"
#define FIT_MSG_MANY "a fit takes at most %d levels; this table has more"
#define FIT_MSG_NONE "no row has a response"
#define FIT_MSG_FIX "--fix %s: NAME=VALUE is expected, VALUE a finite number"
#define FIT_MSG_FIX_TWICE "--fix %s: the parameter is fixed twice"

#endif
