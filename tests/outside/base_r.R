# SPDX-License-Identifier: GPL-3.0-or-later
# base_r.R: a sampler in plain R (base and stats only): 1,000 independent random-walk Metropolis chains
# side by side (Metropolis, Rosenbluth, Rosenbluth, Teller & Teller 1953, Journal of Chemical Physics
# 21:1087), a row of a matrix each. They start from prior draws resampled by a flattened likelihood;
# the proposal's covariance is learnt from all of them, then kept. Every chain is a batch of its own, so
# that errors need no word on autocorrelation.

CHAINS <- 1000
LEARNING <- 12  # rounds of 100 steps each
SETTLING <- 600 # steps with the proposal kept, thrown away
KEPT <- 100     # draws kept of each chain
BETWEEN <- 15   # steps between two of them

# Coordinates: logs where the prior lives above 0 and the value is not a drift_sd, which may be near 0.
log_coordinates <- function(rows) {
    names(rows)[vapply(rows, prior_low, 0) >= 0 & names(rows) != "drift_sd"]
}

log_likelihood <- function(case, m, x) {
    if (case$endpoint == "binary") {
        r <- case$events
        return(drop(m %*% r) - drop((pmax(m, 0) + log1p(exp(-abs(m)))) %*% rep(case$n, ncol(m))))
    }
    sd <- if ("sd" %in% colnames(x)) x[, "sd"] else sqrt(x[, "variance"])
    mean_k <- tapply(case$y, case$level, mean)
    within <- sum((case$y - mean_k[case$level])^2)
    between <- rowSums(sweep(m, 2, mean_k)^2) * case$n
    -length(case$y) * log(sd) - (within + between) / (2 * sd^2)
}

# Log prior and log likelihood of coordinates u, a row a chain; NaN never leaves.
log_posterior <- function(case, rows, logs, u) {
    x <- u
    x[, logs] <- exp(u[, logs])
    prior <- if (length(logs)) rowSums(u[, logs, drop = FALSE]) else numeric(nrow(u)) # Jacobians
    for (name in names(rows)) prior <- prior + prior_log_density(rows[[name]], x[, name])
    for (z in step_names(case)) prior <- prior + dnorm(x[, z], log = TRUE)
    like <- rep(-Inf, nrow(u))
    inside <- is.finite(prior)
    if (any(inside)) {
        x <- x[inside, , drop = FALSE]
        like[inside] <- log_likelihood(case, level_means(case, x), x)
    }
    list(prior = prior, like = ifelse(is.nan(like), -Inf, like))
}

starting_points <- function(case, rows, logs) {
    n <- 50000
    u <- cbind(vapply(rows, prior_draws, numeric(n), n),
               matrix(rnorm(n * length(step_names(case))), n, dimnames = list(NULL, step_names(case))))
    u[, logs] <- log(u[, logs])
    like <- log_posterior(case, rows, logs, u)$like
    weight <- exp(0.3 * (like - max(like)))
    u[sample.int(n, CHAINS, replace = TRUE, prob = weight), ]
}

# Steps of all chains; `root` is the Cholesky factor of the proposal's covariance.
walk <- function(state, steps, root, target) {
    P <- ncol(state$u)
    for (i in seq_len(steps)) {
        size <- sample(c(0.3, 1), 1) * 2.38 / sqrt(P)
        u <- state$u + size * matrix(rnorm(CHAINS * P), CHAINS) %*% root
        value <- target(u)
        go <- log(runif(CHAINS)) < value - state$value
        state$u[go, ] <- u[go, ]
        state$value[go] <- value[go]
    }
    state
}

run_base_r <- function(case, dir) {
    set.seed(1, kind = "Mersenne-Twister", normal.kind = "Inversion")
    rows <- prior_rows(case)
    logs <- log_coordinates(rows)
    target <- function(u) { v <- log_posterior(case, rows, logs, u); v$prior + v$like }
    u <- starting_points(case, rows, logs)
    state <- list(u = u, value = target(u))
    for (i in seq_len(LEARNING)) state <- walk(state, 100, chol(cov(state$u)), target)
    root <- chol(cov(state$u))
    state <- walk(state, SETTLING, root, target)
    kept <- vector("list", KEPT)
    for (i in seq_len(KEPT)) {
        state <- walk(state, BETWEEN, root, target)
        kept[[i]] <- state$u
    }
    u <- do.call(rbind, kept)
    u <- u[order(rep(seq_len(CHAINS), KEPT)), ]
    u[, logs] <- exp(u[, logs])
    sample_of(named_draws(case, u), rep(seq_len(CHAINS), each = KEPT), 1)
}

# Columns as the program names them, and the responses.
named_draws <- function(case, x) {
    m <- level_means(case, x)
    if (case$endpoint == "binary") m <- plogis(m)
    colnames(m) <- response_name(labels_of(case))
    for (name in intersect(c("variance", "drift_variance"), colnames(x))) {
        x[, name] <- sqrt(x[, name])
        colnames(x)[colnames(x) == name] <- sub("variance", "sd", name)
    }
    if (case$curve == "independent") colnames(x)[colnames(x) == "theta1"] <- "theta"
    cbind(x[, intersect(colnames(x), sub("variance", "sd", names(case$priors))), drop = FALSE], m)
}
