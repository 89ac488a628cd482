# SPDX-License-Identifier: GPL-3.0-or-later
# jags.R: a case as a JAGS model, run by JAGS's own command. JAGS computes the level means itself, from
# its own statement of the curve.

JAGS_CHAINS <- 4
JAGS_BURN <- 5000
JAGS_STEPS <- 60000
JAGS_THIN <- 6

jags_missing <- function() {
    if (nzchar(Sys.which("jags"))) NULL else "the command jags is not installed (Debian: jags)"
}

jags_version <- function() {
    said <- system2("jags", input = "exit", stdout = TRUE)
    sub("^Welcome to (JAGS [0-9.]+).*", "\\1", grep("^Welcome", said, value = TRUE)[1])
}

# Means by level (normal) and the sum of squares within levels (sd^2 times a chi-square) are independent
# and say all that normal data say. JAGS is given these.
normal_sums <- function(case) {
    average <- as.vector(tapply(case$y, case$level, mean))
    list(average = average, within = sum((case$y - average[case$level])^2),
         freedom = length(case$y) - length(average))
}

# Statements of the mean at level k; d, top, shift, gap are data.
jags_curves <- list(
    linear = "E0 + slope * d[k]",
    log_linear = "E0 + slope * log(d[k] + shift)",
    quadratic = "E0 + b1 * (d[k] / top) + b2 * pow(d[k] / top, 2)",
    exponential = "E0 + rise * (exp(d[k] / scale) - 1)",
    emax = "E0 + Emax * d[k] / (ED50 + d[k])",
    sigmoid_emax = "E0 + Emax * pow(d[k], h) / (pow(ED50, h) + pow(d[k], h))",
    logistic = "E0 + Emax / (1 + exp((ED50 - d[k]) / spread))")

jags_mean <- function(case, first) {
    K <- length(case$d)
    if (case$curve == "independent")
        return(sprintf("for (k in %d:%d) { mu[k] <- thetas[k - %d] }", first, K, first - 1))
    if (case$curve != "ndlm")
        return(sprintf("for (k in %d:%d) { mu[k] <- %s }", first, K, jags_curves[[case$curve]]))
    start <- sprintf("mu[%d] <- theta", first)
    if (case$order == 1)
        return(c(start, sprintf("for (k in %d:%d) { z[k] ~ dnorm(0, 1)", first + 1, K),
                 "mu[k] <- mu[k - 1] + drift_sd * sqrt(gap[k]) * z[k] }"))
    c(start, sprintf("mu[%d] <- theta + slope", first + 1),
      sprintf("for (k in %d:%d) { z[k] ~ dnorm(0, 1)", first + 2, K),
      "mu[k] <- 2 * mu[k - 1] - mu[k - 2] + drift_sd * z[k] }")
}

jags_priors <- function(case, first) {
    statements <- lapply(names(case$priors), function(name) {
        p <- case$priors[[name]]
        if (case$curve == "independent" && name == "theta")
            return(c(sprintf("for (k in 1:%d) {", length(case$d) - first + 1), prior_jags(p, "thetas[k]"),
                     "}"))
        prior_jags(p, name)
    })
    c(unlist(statements),
      if ("variance" %in% names(case$priors)) "sd <- sqrt(variance)",
      if ("drift_variance" %in% names(case$priors)) "drift_sd <- sqrt(drift_variance)")
}

jags_model <- function(case) {
    first <- if (case$off) 2 else 1
    data <- if (case$endpoint == "binary")
        "for (k in 1:K) { events[k] ~ dbin(response[k], n)
response[k] <- ilogit(mu[k]) }"
    else "tau <- 1 / pow(sd, 2)
within ~ dgamma(freedom / 2, tau / 2)
for (k in 1:K) { average[k] ~ dnorm(mu[k], n * tau)
response[k] <- mu[k] }"
    c("model {", jags_priors(case, first), if (case$off) "mu[1] <- control", jags_mean(case, first), data, "}")
}

jags_data <- function(case) {
    on <- if (case$off) case$d[-1] else case$d
    data <- list(K = length(case$d), n = case$n)
    if (case$endpoint == "binary") data$events <- case$events
    else data <- c(data, normal_sums(case))
    if (case$curve %in% names(jags_curves)) data$d <- case$d
    if (case$curve == "quadratic") data$top <- max(on)
    if (case$curve == "log_linear") data$shift <- case$shift
    if (case$curve == "ndlm" && case$order == 1)
        data$gap <- c(rep(1, length(case$d) - length(on) + 1), step_scale(on, case)^2)
    data
}

# The names to watch and the columns they become.
jags_watched <- function(case) {
    names <- sub("variance", "sd", names(case$priors))
    watched <- ifelse(names == "theta" & case$curve == "independent", "thetas[1]", names)
    K <- seq_along(case$d)
    setNames(c(names, response_name(labels_of(case))), c(watched, sprintf("response[%d]", K)))
}

write_dump <- function(values, file) {
    text <- vapply(values, function(v) {
        v <- if (is.character(v)) sprintf('"%s"', v) else sprintf("%.15g", v)
        if (length(v) > 1) sprintf("c(%s)", paste(v, collapse = ", ")) else v
    }, "")
    writeLines(sprintf('"%s" <- %s', names(values), text), file)
}

jags_script <- function(case) {
    chains <- seq_len(JAGS_CHAINS)
    watched <- unique(sub("\\[[0-9]+\\]$", "", names(jags_watched(case))))
    c("load glm", 'model in "model.bug"', 'data in "data.R"', sprintf("compile, nchains(%d)", JAGS_CHAINS),
      sprintf('parameters in "start%d.R", chain(%d)', chains, chains), "initialize",
      sprintf("update %d", JAGS_BURN), sprintf("monitor set %s, thin(%d)", watched, JAGS_THIN),
      sprintf("update %d", JAGS_STEPS), 'coda *, stem("coda")', "exit")
}

run_jags <- function(case, dir) {
    writeLines(jags_model(case), file.path(dir, "model.bug"))
    write_dump(jags_data(case), file.path(dir, "data.R"))
    for (i in seq_len(JAGS_CHAINS))
        write_dump(list(.RNG.name = "base::Mersenne-Twister", .RNG.seed = i),
                   file.path(dir, sprintf("start%d.R", i)))
    writeLines(jags_script(case), file.path(dir, "script"))
    said <- system2("sh", c("-c", shQuote(sprintf("cd %s && jags script 2>&1", shQuote(dir)))), stdout = TRUE)
    if (!file.exists(file.path(dir, "codachain1.txt"))) stop("JAGS: ", paste(tail(said, 5), collapse = " "))
    read_coda(case, dir)
}

read_coda <- function(case, dir) {
    watched <- jags_watched(case)
    index <- read.table(file.path(dir, "codaindex.txt"), stringsAsFactors = FALSE)
    rows <- lapply(seq_len(JAGS_CHAINS), function(i) {
        file <- file.path(dir, sprintf("codachain%d.txt", i))
        v <- scan(file, what = list(NULL, 0), quiet = TRUE)[[2]]
        vapply(names(watched), function(w) {
            at <- index[index[[1]] == w, ]
            v[at[[2]]:at[[3]]]
        }, numeric(index[1, 3] - index[1, 2] + 1))
    })
    draws <- do.call(rbind, rows)
    colnames(draws) <- watched
    sample_of(draws, rep(seq_len(JAGS_CHAINS), each = nrow(rows[[1]])), 64)
}
