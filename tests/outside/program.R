# SPDX-License-Identifier: GPL-3.0-or-later
# program.R: runs `terrace analyze` on a case and reads what it reports.

# A small reader of JSON: objects become named lists, arrays lists, null NA. Escapes are left as they are.
read_json <- function(file) {
    text <- paste(readLines(file, warn = FALSE), collapse = "\n")
    pattern <- '"(?:[^"\\\\]|\\\\.)*"|-?[0-9][-+0-9.eE]*|true|false|null|[][{}:,]'
    token <- regmatches(text, gregexpr(pattern, text, perl = TRUE))[[1]]
    at <- 0
    take <- function() { at <<- at + 1; token[at] }
    plain <- function(t) switch(t, true = TRUE, false = FALSE, null = NA,
                                if (startsWith(t, '"')) substr(t, 2, nchar(t) - 1) else as.numeric(t))
    value <- function() {
        t <- take()
        if (!t %in% c("{", "[")) return(plain(t))
        out <- list()
        if (token[at + 1] %in% c("}", "]")) { take(); return(out) }
        repeat {
            key <- if (t == "{") { k <- plain(take()); take(); k } else length(out) + 1
            out[[key]] <- value()
            if (take() != ",") return(out)
        }
    }
    value()
}

FIGURES <- c("mean", "sd", "q025", "q50", "q975")

# Figures by column, probabilities by name, and the draws; `why` if there is no result to compare.
run_program <- function(case, dir) {
    design <- file.path(dir, "design.json")
    out <- file.path(dir, "out")
    writeLines(design_text(case), design)
    writeLines(data_text(case), file.path(dir, "data.csv"))
    arguments <- c("analyze", design, file.path(dir, "data.csv"), "--final", "--draws", "--threads", "1",
                   "--quiet", "--out", out)
    status <- system2(Sys.getenv("TERRACE"), arguments, stdout = FALSE, stderr = file.path(dir, "messages"))
    if (status != 0)
        return(list(why = paste(c(sprintf("analyze ended with status %d:", status),
                                  readLines(file.path(dir, "messages"))), collapse = " ")))
    result <- read_json(file.path(out, "analysis.json"))
    list(why = NULL, figures = figures_of(case, result), shares = shares_of(case, result),
         sample = draws_of(case, file.path(out, "draws.csv")))
}

figures_of <- function(case, result) {
    rows <- c(result$parameters, lapply(result$levels, `[[`, "response"))
    figures <- t(vapply(rows, function(r) unlist(r[FIGURES]), numeric(5)))
    rownames(figures) <- c(vapply(result$parameters, `[[`, "", "name"), response_name(labels_of(case)))
    figures
}

shares_of <- function(case, result) {
    active <- result$levels[-1]
    labels <- labels_of(case)[-1]
    gain <- vapply(active, function(l) l$gain$pr_positive, 0)
    target <- vapply(active, function(l) l$pr_target$ED90, 0)
    setNames(as.list(c(gain, target, result$targets$ED90$pr_none)),
             c(paste("Pr gain > 0 at", labels), paste("Pr ED90 at", labels), "Pr ED90 at none"))
}

draws_of <- function(case, file) {
    table <- read.csv(file, check.names = FALSE)
    draws <- as.matrix(table[, -(1:2)])
    colnames(draws) <- sub("^response_", "response ", colnames(draws))
    in_order <- order(table[[1]], table[[2]])
    examine(sample_of(draws[in_order, ], as.integer(factor(table[[1]]))[in_order], 32))
}
