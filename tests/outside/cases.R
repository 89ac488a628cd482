# SPDX-License-Identifier: GPL-3.0-or-later
# cases.R: the cases: a curve, an endpoint, priors and invented data; and the files that say them to
# the program. Data are made without random numbers, so that they are the same under every R.

# How a parameter vector becomes level means: x is a matrix, a row a draw, a column a parameter; the
# columns z1, z2, ... of a walk are standard normal steps. Returns a row a draw, a column a level.
curve_means <- list(
    linear = function(x, d, k) x[, "E0"] + outer(x[, "slope"], d),
    log_linear = function(x, d, k) x[, "E0"] + outer(x[, "slope"], log(d + k$shift)),
    quadratic = function(x, d, k) {
        u <- d / max(d)
        x[, "E0"] + outer(x[, "b1"], u) + outer(x[, "b2"], u^2)
    },
    emax = function(x, d, k) x[, "E0"] + x[, "Emax"] * outer(x[, "ED50"], d, function(e, d) d / (e + d)),
    sigmoid_emax = function(x, d, k) {
        share <- sapply(d, function(v) if (v == 0) 0 * x[, "h"] else plogis(x[, "h"] * log(v / x[, "ED50"])))
        x[, "E0"] + x[, "Emax"] * matrix(share, nrow(x))
    },
    logistic = function(x, d, k) {
        z <- outer(x[, "ED50"], d, function(e, d) d - e) / x[, "spread"]
        x[, "E0"] + x[, "Emax"] * plogis(z)
    },
    exponential = function(x, d, k) x[, "E0"] + x[, "rise"] * expm1(outer(1 / x[, "scale"], d)),
    ndlm = function(x, d, k) walk_means(x, d, k),
    independent = function(x, d, k) x[, paste0("theta", seq_along(d)), drop = FALSE])

drift_of <- function(x) {
    if ("drift_sd" %in% colnames(x)) x[, "drift_sd"] else sqrt(x[, "drift_variance"])
}

step_scale <- function(d, k) {
    gap <- diff(d)
    if (k$spacing == "actual") sqrt(gap / mean(gap)) else rep(1, length(gap))
}

walk_means <- function(x, d, k) {
    m <- matrix(x[, "theta"], nrow(x), length(d))
    drift <- drift_of(x)
    if (k$order == 2) m[, 2] <- m[, 1] + x[, "slope"]
    for (i in seq(k$order + 1, length(d))) {
        z <- x[, paste0("z", i - k$order)]
        m[, i] <- if (k$order == 2) 2 * m[, i - 1] - m[, i - 2] + drift * z
                  else m[, i - 1] + drift * step_scale(d, k)[i - 1] * z
    }
    m
}

level_means <- function(case, x) {
    on <- if (case$off) case$d[-1] else case$d
    m <- curve_means[[case$curve]](x, on, case)
    if (case$off) cbind(x[, "control"], m) else m
}

# Parameters by the names of the priors; independent levels repeat one prior; a walk has steps beside.
prior_rows <- function(case) {
    if (case$curve != "independent") return(case$priors)
    on <- length(case$d) - case$off
    thetas <- setNames(rep(case$priors["theta"], on), paste0("theta", seq_len(on)))
    c(thetas, case$priors[names(case$priors) != "theta"])
}

step_names <- function(case) {
    if (case$curve != "ndlm") return(character(0))
    paste0("z", seq_len(length(case$d) - case$off - case$order))
}

labels_of <- function(case) paste(case$d, "mg")

# --- data: quantiles of the normal in scrambled places, with a fixed push for every level, so that no
# --- curve fits exactly

push <- c(0.6, -0.9, 0.4, 1.0, -0.7, 0.3, -0.5)

make_data <- function(case) {
    K <- length(case$d)
    m <- case$truth + push[seq_len(K)] * case$push
    if (case$endpoint == "binary") {
        case$events <- round(case$n * plogis(m))
        return(case)
    }
    case$y <- unlist(lapply(seq_len(K), function(k) {
        i <- (seq_len(case$n) * 7 + k * 3) %% case$n
        round(m[k] + case$sd * qnorm((i + 0.5) / case$n), 2)
    }))
    case$level <- rep(seq_len(K), each = case$n)
    case
}

# --- the table

new_case <- function(name, curve, endpoint, truth, priors, d = c(0, 1, 2, 4, 8), off = FALSE, order = 1,
                     spacing = "steps", shift = 1, better = "higher") {
    continuous <- endpoint == "continuous"
    case <- list(name = name, curve = curve, endpoint = endpoint, truth = truth, priors = priors, d = d,
                 off = off, order = order, spacing = spacing, shift = shift, better = better,
                 n = if (continuous) 20 else 60, sd = 2, push = if (continuous) 0.3 else 0.15)
    make_data(case)
}

# Truths of the levels 0, 1, 2, 4, 8 mg, on the scale of the mean and of the logit, a pair a curve.
truths <- list(
    linear = list(c(0, .3, .6, 1.2, 2.4), c(-.6, -.5, -.3, 0, .6)),
    log_linear = list(c(0, .7, 1.1, 1.6, 2.2), c(-.7, -.2, 0, .4, .8)),
    quadratic = list(c(0, .8, 1.4, 2, 1.5), c(-.8, -.3, .1, .5, .2)),
    exponential = list(c(0, .2, .5, 1.2, 3), c(-.8, -.7, -.5, -.2, .8)),
    emax = list(c(0, 1.3, 1.9, 2.6, 3.1), c(-.8, -.1, .3, .6, .9)),
    sigmoid_emax = list(c(0, .3, 1.3, 2.5, 2.9), c(-.8, -.6, 0, .7, .9)),
    logistic = list(c(.2, .4, .9, 2.2, 3), c(-.8, -.7, -.4, .5, .9)),
    ndlm = list(c(0, .5, 1.3, 1.7, 1.6), c(-.8, -.4, .2, .5, .4)),
    independent = list(c(0, .6, 1.2, 1.6, 1.5), c(-.7, -.4, .1, .5, .4)))

# Usual priors by parameter: for a mean, for a logit.
usual <- list(
    E0 = list(prior("normal", 0, 3), prior("normal", 0, 1.5)),
    theta = list(prior("normal", 0, 4), prior("normal", 0, 1.5)),
    control = list(prior("normal", 0, 3), prior("normal", 0, 1.5)),
    slope = list(prior("normal", 0, 2), prior("normal", 0, 1)),
    b1 = list(prior("normal", 0, 6), prior("normal", 0, 3)),
    b2 = list(prior("normal", 0, 6), prior("normal", 0, 3)),
    rise = list(prior("normal", 0, 3), prior("normal", 0, 1.5)),
    scale = list(prior("lognormal", 1.8, 0.35), prior("lognormal", 1.8, 0.35)),
    Emax = list(prior("normal", 0, 6), prior("normal", 0, 3)),
    ED50 = list(prior("lognormal", 0.7, 0.7), prior("lognormal", 0.7, 0.7)),
    h = list(prior("lognormal", 0.5, 0.4), prior("lognormal", 0.5, 0.4)),
    spread = list(prior("lognormal", 0, 0.5), prior("lognormal", 0, 0.5)),
    drift_sd = list(prior("half_normal", 2), prior("half_normal", 1)),
    sd = list(prior("half_normal", 4), NULL))

usual_priors <- function(names, endpoint) {
    lapply(setNames(nm = names), function(p) usual[[p]][[if (endpoint == "continuous") 1 else 2]])
}

curve_parameters <- list(
    linear = c("E0", "slope"), log_linear = c("E0", "slope"), quadratic = c("E0", "b1", "b2"),
    exponential = c("E0", "rise", "scale"), emax = c("E0", "Emax", "ED50"),
    sigmoid_emax = c("E0", "Emax", "ED50", "h"), logistic = c("E0", "Emax", "ED50", "spread"),
    ndlm = c("theta", "drift_sd"), independent = "theta")

# A case with the usual priors, of which `...` replaces some. A prior on variance or drift_variance
# takes the place of the one on sd or drift_sd.
usual_case <- function(curve, endpoint, note = "", ..., order = 1, off = FALSE, priors = list()) {
    names <- curve_parameters[[curve]]
    if (order == 2) names <- append(names, "slope", 1)
    if (endpoint == "continuous") names <- c(names, "sd")
    if (off) names <- c("control", names)
    all <- usual_priors(names, endpoint)
    for (p in names(priors)) {
        at <- match(sub("variance", "sd", sub("^variance$", "sd", p)), names(all))
        all[[at]] <- priors[[p]]
        names(all)[at] <- p
    }
    if (curve == "logistic" && is.null(priors$ED50)) all$ED50 <- prior("normal", 3, 2)
    truth <- truths[[curve]][[if (endpoint == "continuous") 1 else 2]]
    name <- paste0(curve, if (curve == "ndlm") paste(" order", order), if (note != "") ", ", note, ", ",
                   endpoint)
    new_case(name, curve, endpoint, truth, all, order = order, off = off, ...)
}

every_curve <- function(endpoint) list(
    usual_case("linear", endpoint),
    usual_case("log_linear", endpoint, shift = 0.5),
    usual_case("quadratic", endpoint),
    usual_case("exponential", endpoint),
    usual_case("emax", endpoint),
    usual_case("sigmoid_emax", endpoint),
    usual_case("logistic", endpoint),
    usual_case("ndlm", endpoint),
    usual_case("ndlm", endpoint, "actual gaps", spacing = "actual"),
    usual_case("ndlm", endpoint, order = 2),
    usual_case("independent", endpoint))

other_priors <- function() list(
    usual_case("linear", "continuous", "Student t, cut normal, inverse gamma variance", priors = list(
        E0 = prior("student_t", 5, 1, 1), slope = prior("normal", 0, 1, above = 0.25),
        variance = prior("inverse_gamma", 4, 8))),
    usual_case("quadratic", "binary", "Student t, uniform, cut normal", priors = list(
        E0 = prior("student_t", 4, 0, 0.7), b1 = prior("uniform", 0, 5),
        b2 = prior("normal", -1, 2, below = -1.5))),
    usual_case("emax", "continuous", "gamma, Student t, lognormal sd", priors = list(
        Emax = prior("student_t", 5, 4, 2), ED50 = prior("gamma", 3, 1.5),
        sd = prior("lognormal", 0.5, 0.3))),
    usual_case("sigmoid_emax", "binary", "cut normals, cut gamma", priors = list(
        Emax = prior("normal", 2, 2, above = 0, below = 5), ED50 = prior("normal", 3, 2, above = 0),
        h = prior("gamma", 4, 2, below = 5))),
    usual_case("logistic", "continuous", "uniform, half normal, gamma variance", priors = list(
        ED50 = prior("uniform", 0, 7), spread = prior("half_normal", 1.5, above = 0.25),
        variance = prior("gamma", 8, 2))),
    usual_case("ndlm", "continuous", "inverse gamma drift variance, uniform, gamma sd", priors = list(
        theta = prior("uniform", -3, 3), drift_variance = prior("inverse_gamma", 4, 5),
        sd = prior("gamma", 6, 3))),
    usual_case("ndlm", "binary", "Student t, gamma drift", order = 2, priors = list(
        theta = prior("student_t", 5, -1, 0.6), slope = prior("normal", 0, 1, above = 0.2),
        drift_sd = prior("gamma", 2, 3))),
    usual_case("independent", "binary", "Student t", priors = list(theta = prior("student_t", 4, 0, 0.8))),
    usual_case("emax", "continuous", "control off the curve", off = TRUE),
    usual_case("ndlm", "binary", "control off the curve, lower is better", off = TRUE, better = "lower"))

all_cases <- function() c(every_curve("continuous"), every_curve("binary"), other_priors())

# --- the files

design_text <- function(case) {
    labels <- labels_of(case)
    levels <- paste(sprintf('{"label": "%s", "value": %.15g}', labels, case$d), collapse = ", ")
    priors <- paste(sprintf('"%s": %s', names(case$priors), vapply(case$priors, prior_json, "")),
                    collapse = ", ")
    extra <- c(if (case$curve == "log_linear") sprintf(', "shift": %.15g', case$shift),
               if (case$curve == "ndlm") sprintf(', "order": %d', case$order),
               if (case$spacing == "actual") ', "spacing": "actual"')
    sprintf('{"terrace": 1, "title": "Against outside samplers",
 "levels": {"unit": "mg", "control": "%s", "control_on_curve": %s, "list": [%s]},
 "endpoint": {"name": "Response", "type": "%s", "better": "%s"},
 "model": {"curve": "%s"%s, "priors": {%s}},
 "targets": {"ED90": {"rule": "effective_dose", "fraction": 0.9}},
 "subjects": %d, "mcmc": {"max_draws": 64000, "precision": 0.0001}, "seed": 7}\n',
        labels[1], if (case$off) "false" else "true", levels, case$endpoint, case$better, case$curve,
        paste(extra, collapse = ""), priors, case$n * length(case$d))
}

data_text <- function(case) {
    K <- length(case$d)
    response <- if (case$endpoint == "continuous") sprintf("%.15g", case$y)
                else unlist(lapply(case$events, function(e) rep(1:0, c(e, case$n - e))))
    level <- rep(labels_of(case), each = case$n)
    c("subject,level,response", sprintf("%d,%s,%s", seq_along(level), level, response))
}
