# SPDX-License-Identifier: GPL-3.0-or-later
# stan.R: a case as data of model.stan, run through the R package rstan.

STAN_CHAINS <- 4
STAN_BURN <- 1000
STAN_KEPT <- 5000
MOST_DIVERGENT <- 0.001 # of the transitions

stan_missing <- function() {
    if (!quietly(requireNamespace("rstan", quietly = TRUE))) 
        return("the R package rstan is not installed (Debian: r-cran-rstan)")
    if (!nzchar(Sys.which("g++"))) return("rstan needs the compiler g++")
    if (!nzchar(boost())) return("rstan needs Boost (Debian: libboost-dev)")
    NULL
}

stan_version <- function() sprintf("Stan %s (rstan %s)", rstan::stan_version(), packageVersion("rstan"))

# Divergent transitions are counted by us, and base R without the package codetools is no fault.
quietly <- function(expression) {
    muffle <- function(m) if (grepl("codetools", conditionMessage(m))) invokeRestart("muffleMessage")
    suppressWarnings(withCallingHandlers(expression, message = muffle))
}

# The R package BH, or where Debian keeps Boost.
boost <- function() {
    of_package <- system.file("include", package = "BH")
    if (nzchar(of_package)) of_package else if (dir.exists("/usr/include/boost")) "/usr/include" else ""
}

compile_stan <- function() {
    rstan::rstan_options(boost_lib = boost())
    quietly(rstan::stan_model("tests/outside/model.stan", save_dso = TRUE))
}

stan_data <- function(case) {
    rows <- prior_rows(case)
    P <- length(rows)
    K <- length(case$d)
    on <- if (case$off) case$d[-1] else case$d
    # those of the curve first, then the control, then sd
    rows <- rows[c(which(!names(rows) %in% c("control", "sd", "variance")),
                   which(names(rows) == "control"), which(names(rows) %in% c("sd", "variance")))]
    at <- function(names) { i <- match(names, names(rows)); i <- i[!is.na(i)]; if (length(i)) i[1] else 0L }
    arg <- t(vapply(rows, function(p) c(p$arg, 0, 0)[1:3], numeric(3)))
    binary <- case$endpoint == "binary"
    list(P = P, family = as.array(match(vapply(rows, `[[`, "", "family"), names(families))), arg = arg,
         low = as.array(vapply(rows, prior_low, 0)), high = as.array(vapply(rows, prior_high, 0)),
         K = K, d = case$d, curve = match(case$curve, stan_curves), order = case$order,
         gap = c(rep(1, K - length(on) + 1), step_scale(on, case)^2), shift = case$shift,
         off = as.integer(case$off), control_at = at("control"), sd_at = at(c("sd", "variance")),
         sd_is_variance = as.integer(at("variance") > 0), drift_at = at(c("drift_sd", "drift_variance")),
         drift_is_variance = as.integer(at("drift_variance") > 0),
         Z = length(step_names(case)), binary = as.integer(binary), N = if (binary) 0L else length(case$y),
         y = if (binary) numeric(0) else case$y, level = if (binary) integer(0) else case$level,
         events = if (binary) case$events else rep(0L, K), n = case$n, rows = names(rows))
}

# Their numbers in model.stan.
stan_curves <- c("linear", "log_linear", "quadratic", "exponential", "emax", "sigmoid_emax", "logistic", "ndlm",
                 "independent")

run_stan <- function(case, dir, model) {
    data <- stan_data(case)
    fit <- quietly(rstan::sampling(model, data[names(data) != "rows"], chains = STAN_CHAINS, warmup = STAN_BURN,
                                   iter = STAN_BURN + STAN_KEPT, seed = 1, cores = 1, refresh = 0,
                                   pars = c("x", "mu"), init_r = 1, control = list(adapt_delta = 0.99),
                                   save_warmup = FALSE))
    divergent <- rstan::get_num_divergent(fit)
    if (divergent > MOST_DIVERGENT * STAN_CHAINS * STAN_KEPT)
        return(list(why = sprintf("%d divergent transitions", divergent)))
    sample_of(stan_draws(case, fit, data$rows), rep(seq_len(STAN_CHAINS), each = STAN_KEPT), 64)
}

# Columns as the program names them, and the responses.
stan_draws <- function(case, fit, rows) {
    v <- rstan::extract(fit, pars = c("x", "mu"), permuted = FALSE)
    draws <- matrix(v, ncol = dim(v)[3], dimnames = list(NULL, dimnames(v)[[3]]))
    x <- draws[, grepl("^x\\[", colnames(draws)), drop = FALSE]
    m <- draws[, grepl("^mu\\[", colnames(draws)), drop = FALSE]
    if (case$endpoint == "binary") m <- plogis(m)
    colnames(m) <- response_name(labels_of(case))
    for (i in grep("variance", rows)) x[, i] <- sqrt(x[, i])
    colnames(x) <- ifelse(rows == "theta1", "theta", sub("variance", "sd", rows))
    cbind(x[, colnames(x) %in% sub("variance", "sd", names(case$priors)), drop = FALSE], m)
}
