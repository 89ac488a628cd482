# SPDX-License-Identifier: GPL-3.0-or-later
# priors.R: one prior, said four times: for a design file, in R, for JAGS and for Stan. The families
# and their arguments are those of the design file; `above` and `below` cut a prior off.

prior <- function(family, ..., above = -Inf, below = Inf) {
    list(family = family, arg = c(...), above = above, below = below)
}

# Each family: names of its arguments in a design, whether it lives above 0, log density and draws in
# R, and JAGS's distribution. JAGS writes precisions (1 / variance) where R writes standard deviations.
families <- list(
    normal = list(
        args = c("mean", "sd"), positive = FALSE,
        log_density = function(x, a) dnorm(x, a[1], a[2], log = TRUE),
        draw = function(n, a) rnorm(n, a[1], a[2]),
        jags = function(a) sprintf("dnorm(%.15g, %.15g)", a[1], 1 / a[2]^2)),
    half_normal = list(
        args = "sd", positive = TRUE,
        log_density = function(x, a) ifelse(x < 0, -Inf, log(2) + dnorm(x, 0, a[1], log = TRUE)),
        draw = function(n, a) abs(rnorm(n, 0, a[1])),
        jags = function(a) sprintf("dnorm(0, %.15g)", 1 / a[1]^2)),
    lognormal = list(
        args = c("meanlog", "sdlog"), positive = TRUE,
        log_density = function(x, a) dlnorm(x, a[1], a[2], log = TRUE),
        draw = function(n, a) rlnorm(n, a[1], a[2]),
        jags = function(a) sprintf("dlnorm(%.15g, %.15g)", a[1], 1 / a[2]^2)),
    gamma = list(
        args = c("shape", "rate"), positive = TRUE,
        log_density = function(x, a) dgamma(x, a[1], rate = a[2], log = TRUE),
        draw = function(n, a) rgamma(n, a[1], rate = a[2]),
        jags = function(a) sprintf("dgamma(%.15g, %.15g)", a[1], a[2])),
    inverse_gamma = list( # x is inverse gamma when 1 / x is gamma: density of 1 / x times 1 / x^2
        args = c("shape", "scale"), positive = TRUE,
        log_density = function(x, a)
            ifelse(x <= 0, -Inf, dgamma(1 / abs(x), a[1], rate = a[2], log = TRUE) - 2 * log(abs(x))),
        draw = function(n, a) 1 / rgamma(n, a[1], rate = a[2]),
        jags = function(a) sprintf("dgamma(%.15g, %.15g)", a[1], a[2])), # of 1 / x
    uniform = list(
        args = c("min", "max"), positive = FALSE,
        log_density = function(x, a) dunif(x, a[1], a[2], log = TRUE),
        draw = function(n, a) runif(n, a[1], a[2]),
        jags = function(a) sprintf("dunif(%.15g, %.15g)", a[1], a[2])),
    student_t = list(
        args = c("df", "location", "scale"), positive = FALSE,
        log_density = function(x, a) dt((x - a[2]) / a[3], a[1], log = TRUE) - log(a[3]),
        draw = function(n, a) a[2] + a[3] * rt(n, a[1]),
        jags = function(a) sprintf("dt(%.15g, %.15g, %.15g)", a[2], 1 / a[3]^2, a[1])))

family_of <- function(p) families[[p$family]]

# Ends of the support after the cut.
prior_low <- function(p) {
    low <- if (family_of(p)$positive) 0 else if (p$family == "uniform") p$arg[1] else -Inf
    max(low, p$above)
}

prior_high <- function(p) min(if (p$family == "uniform") p$arg[2] else Inf, p$below)

prior_json <- function(p) {
    values <- setNames(p$arg, family_of(p)$args)
    if (is.finite(p$above)) values["above"] <- p$above
    if (is.finite(p$below)) values["below"] <- p$below
    members <- sprintf('"%s": %.15g', names(values), values)
    sprintf('{"%s": {%s}}', p$family, paste(members, collapse = ", "))
}

# Up to a constant: what a cut leaves is not renormalised, which no posterior feels.
prior_log_density <- function(p, x) {
    inside <- x > p$above & x < p$below
    ifelse(inside, family_of(p)$log_density(x, p$arg), -Inf)
}

prior_draws <- function(p, n) {
    x <- numeric(0)
    while (length(x) < n) {
        new <- family_of(p)$draw(n, p$arg)
        x <- c(x, new[new > p$above & new < p$below])
    }
    x[seq_len(n)]
}

# Statements that declare `name` in JAGS.
prior_jags <- function(p, name) {
    text <- family_of(p)$jags(p$arg)
    end <- function(x) if (is.finite(x)) sprintf("%.15g", x) else ""
    if (p$family != "inverse_gamma") {
        low <- if (p$family == "half_normal") max(0, p$above) else p$above
        cut <- is.finite(low) || is.finite(p$below)
        return(paste0(name, " ~ ", text, if (cut) sprintf(" T(%s,%s)", end(low), end(p$below))))
    }
    inverse <- paste0("inverse_", gsub("[^A-Za-z_]", "", name))
    cut <- is.finite(p$above) || is.finite(p$below)
    c(paste0(inverse, " ~ ", text,
             if (cut) sprintf(" T(%s,%s)", if (is.finite(p$below)) end(1 / p$below) else "",
                              if (is.finite(p$above)) end(1 / p$above) else "")),
      paste0(name, " <- 1 / ", inverse))
}
