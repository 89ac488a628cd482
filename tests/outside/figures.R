# SPDX-License-Identifier: GPL-3.0-or-later
# figures.R: the figures of a set of draws, their Monte Carlo errors, and the comparison.
#
# Draws are a matrix: a column a parameter (named as in the design) or a level response, rows in the
# order drawn, with the number of the batch of every row beside. Batches are stretches of one chain, or
# whole chains where there are very many; errors are those of batch means (Flegal & Jones 2010, Batch
# means and spectral variance estimators in Markov chain Monte Carlo, Annals of Statistics 38:1034).

LIMIT <- 4        # combined standard errors
LEAST_ESS <- 2000 # of every column of an outside sampler
MOST_RHAT <- 1.01
MOST_HALVES <- 5  # standard errors between the halves of all chains
MOST_LINK <- 0.3  # correlation of a batch mean with the next

sample_of <- function(draws, chain, per_chain) {
    length_of <- tabulate(chain)
    place <- sequence(length_of)
    stretch <- pmin(per_chain, 1 + (place - 1) %/% ceiling(length_of[chain] / per_chain))
    list(draws = draws, batch = (chain - 1) * per_chain + stretch, chain = chain, per_chain = per_chain,
         second_half = place > length_of[chain] / 2)
}

batch_means <- function(x, s) rowsum(as.numeric(x), s$batch)[, 1] / tabulate(s$batch)
mean_error <- function(x, s) { m <- batch_means(x, s); sd(m) / sqrt(length(m)) }

# Error of a standard deviation by the delta method.
sd_error <- function(x, s) mean_error((x - mean(x))^2, s) / (2 * sd(x))

# The effective number of draws of a share; where all draws agree, that of the worst column.
share_ess <- function(indicator, s) {
    p <- mean(indicator)
    e <- mean_error(indicator, s)
    if (e > 0) min(length(indicator), p * (1 - p) / e^2) else s$least_ess
}

# Error of the difference of two shares that are equal if all is well (the score test), so that rare
# events are judged fairly; one event more on either side keeps it above 0.
share_error <- function(a, s, b, t) {
    A <- share_ess(a, s)
    B <- share_ess(b, t)
    q <- (mean(a) * A + mean(b) * B + 1) / (A + B + 2)
    sqrt(q * (1 - q) * (1 / A + 1 / B))
}

# --- is the sampler fit to judge?

split_rhat <- function(x, s) {
    part <- 2 * s$chain - !s$second_half
    n <- length(x) / max(part)
    m <- rowsum(x, part)[, 1] / tabulate(part)
    within <- mean(tapply(x, part, var))
    sqrt((n - 1) / n + var(m) / within)
}

halves <- function(x, s) {
    difference <- batch_means_of_halves(x, s)
    abs(mean(difference)) / (sd(difference) / sqrt(length(difference)))
}

# Second half less first half of each chain (or of groups of stretches, where chains are few).
batch_means_of_halves <- function(x, s) {
    m <- batch_means(x, s)
    if (s$per_chain == 1) {
        first <- rowsum(x[!s$second_half], s$chain[!s$second_half])[, 1]
        second <- rowsum(x[s$second_half], s$chain[s$second_half])[, 1]
        return((second - first) / (tabulate(s$chain) / 2))
    }
    m <- matrix(m, s$per_chain)
    h <- s$per_chain / 2
    c(m[h + seq_len(h), ] - m[seq_len(h), ])
}

link <- function(x, s) {
    if (s$per_chain == 1) return(0)
    m <- matrix(batch_means(x, s), s$per_chain)
    m <- m - mean(m)
    sum(m[-1, ] * m[-s$per_chain, ]) / sum(m^2)
}

effective <- function(x, s) var(x) / mean_error(x, s)^2

# Adds least_ess; `why` is a sentence when the sampler is not fit to judge, else NULL.
examine <- function(s) {
    each <- function(f) apply(s$draws, 2, f, s)
    ess <- each(effective)
    s$least_ess <- min(ess)
    worst_link <- max(each(link))
    worst_halves <- max(each(halves))
    worst_rhat <- if (s$per_chain == 1) 1 else max(each(split_rhat))
    s$why <-
        if (!all(is.finite(s$draws))) "a draw is not finite"
        else if (min(ess) < LEAST_ESS)
            sprintf("only %.0f effective draws of %s", min(ess), names(which.min(ess)))
        else if (worst_rhat > MOST_RHAT) sprintf("R-hat %.3f", worst_rhat)
        else if (worst_halves > MOST_HALVES)
            sprintf("halves of the chains differ by %.1f standard errors", worst_halves)
        else if (worst_link > MOST_LINK) sprintf("batches are correlated (%.2f)", worst_link)
    s
}

# --- figures

response_name <- function(labels) paste("response", labels)

# Indicators by name: gain over the control above 0, and being the lowest active level with 90% of the
# largest gain.
indicators <- function(case, s) {
    labels <- labels_of(case)
    m <- s$draws[, response_name(labels)]
    gain <- (if (case$better == "higher") 1 else -1) * (m[, -1] - m[, 1])
    largest <- do.call(pmax, as.data.frame(gain))
    lowest <- max.col((gain >= 0.9 * largest) + 0, ties.method = "first")
    lowest[largest <= 0] <- 0
    is <- cbind(gain > 0, outer(lowest, seq_len(ncol(gain)), "=="), lowest == 0) + 0
    colnames(is) <- c(paste("Pr gain > 0 at", labels[-1]), paste("Pr ED90 at", labels[-1]), "Pr ED90 at none")
    is
}

# Difference in combined standard errors of every figure: `program` has the figures as the program
# reports them and its draws (for their error), `other` the outside sampler's draws.
differences <- function(case, program, other) {
    columns <- rownames(program$figures)
    by_column <- lapply(columns, function(name) {
        x <- program$sample$draws[, name]
        y <- other$draws[, name]
        f <- program$figures[name, ]
        z <- c((f["mean"] - mean(y)) / sqrt(mean_error(x, program$sample)^2 + mean_error(y, other)^2),
               (f["sd"] - sd(y)) / sqrt(sd_error(x, program$sample)^2 + sd_error(y, other)^2),
               vapply(c(q025 = .025, q50 = .5, q975 = .975), function(p) {
                   q <- f[c(".025" = "q025", ".5" = "q50", ".975" = "q975")[sub("^0", "", p)]]
                   (mean(y <= q) - p) / share_error(x <= q, program$sample, y <= q, other)
               }, 0))
        setNames(z, paste(name, c("mean", "sd", "2.5%", "50%", "97.5%")))
    })
    a <- indicators(case, program$sample)
    b <- indicators(case, other)
    by_share <- vapply(colnames(a), function(name) {
        (program$shares[[name]] - mean(b[, name])) / share_error(a[, name], program$sample, b[, name], other)
    }, 0)
    c(unlist(by_column), by_share)
}
