# SPDX-License-Identifier: GPL-3.0-or-later
# main.R: every case through the program and through each sampler that is installed; one line each.

for (file in c("priors.R", "cases.R", "figures.R", "program.R", "base_r.R", "jags.R", "stan.R"))
    source(file.path("tests/outside", file))

say <- function(...) cat(sprintf(...), "\n", sep = "")

give_up <- function(..., status = 1L) {
    say(...)
    quit(status = status)
}

# --- options: --only PATTERN, names of samplers

read_options <- function(words) {
    options <- list(only = "", samplers = c("base-r", "jags", "stan"))
    at <- match("--only", words)
    if (!is.na(at)) {
        options$only <- words[at + 1]
        words <- words[-c(at, at + 1)]
    }
    bad <- setdiff(words, options$samplers)
    if (length(bad)) {
        give_up("no such sampler or option: %s (base-r, jags, stan, --only PATTERN)", bad[1], status = 2L)
    }
    if (length(words)) options$samplers <- words
    options
}

# Samplers that are installed: name -> function of a case and a directory. What is missing is said.
installed <- function(names) {
    samplers <- list()
    missing <- list(jags = jags_missing(), stan = if ("stan" %in% names) stan_missing())
    for (name in names) if (!is.null(missing[[name]])) say("skip - %s # %s", name, missing[[name]])
    names <- setdiff(names, names(Filter(Negate(is.null), missing)))
    if ("base-r" %in% names) samplers[["base-r"]] <- run_base_r
    if ("jags" %in% names) samplers$jags <- run_jags
    if ("stan" %in% names) {
        model <- tryCatch(compile_stan(), error = function(e) give_up("not ok - stan: %s", conditionMessage(e)))
        samplers$stan <- function(case, dir) run_stan(case, dir, model)
    }
    say("# %s", paste(c(R.version.string, if ("jags" %in% names) jags_version(),
                        if ("stan" %in% names) stan_version()), collapse = "; "))
    samplers
}

# --- one case

judge <- function(case, program, sampler, dir) {
    other <- tryCatch({
        s <- sampler(case, dir)
        if (is.null(s$why)) examine(s) else s
    }, error = function(e) list(failed = conditionMessage(e)))
    if (!is.null(other$failed)) return(list(verdict = "not ok", note = other$failed))
    if (!is.null(other$why)) return(list(verdict = "skip", note = paste("#", other$why)))
    z <- differences(case, program, other)
    worst <- which.max(abs(z))
    good <- all(is.finite(z)) && abs(z[worst]) <= LIMIT
    list(verdict = if (good) "ok" else "not ok", largest = abs(z[[worst]]), figures = length(z),
         note = sprintf("%d figures, the largest difference %.1f standard errors (%s), %.0f effective draws",
                        length(z), abs(z[worst]), names(z)[worst], other$least_ess))
}

line_of <- function(case, name, j, seconds) {
    sprintf("%s - %s: %s%s%s (%.1f s)", j$verdict, case$name, name, if (j$verdict == "skip") " " else ": ",
            j$note, seconds)
}

run_case <- function(case, samplers) {
    dir <- tempfile("case", Sys.getenv("WORK"))
    dir.create(dir)
    on.exit(unlink(dir, recursive = TRUE))
    program <- run_program(case, dir)
    if (is.null(program$why)) program$why <- program$sample$why
    results <- list()
    for (name in names(samplers)) {
        start <- proc.time()[["elapsed"]]
        j <- if (!is.null(program$why)) list(verdict = "not ok", note = program$why)
             else judge(case, program, samplers[[name]], dir)
        say("%s", line_of(case, name, j, proc.time()[["elapsed"]] - start))
        results[[name]] <- j
    }
    results
}

# --- that a difference would be noticed: the outside sampler gets a prior on `name` half as wide again

run_wrong <- function(case, name) {
    wrong <- case
    wrong$priors[[name]]$arg[2] <- wrong$priors[[name]]$arg[2] * 1.5
    dir <- tempfile("case", Sys.getenv("WORK"))
    dir.create(dir)
    on.exit(unlink(dir, recursive = TRUE))
    j <- judge(case, run_program(case, dir), function(ignored, dir) run_base_r(wrong, dir), dir)
    noticed <- j$verdict == "not ok" && !is.null(j$largest)
    say("%s - a prior of %s half as wide again is noticed: %s: %s", if (noticed) "ok" else "not ok", name,
        case$name, j$note)
    list(verdict = if (noticed) "ok" else "not ok")
}

summary_lines <- function(results, samplers) {
    for (name in names(samplers)) {
        of <- lapply(results, `[[`, name)
        verdict <- vapply(of, `[[`, "", "verdict")
        largest <- max(0, unlist(lapply(of, `[[`, "largest")))
        figures <- sum(unlist(lapply(of, `[[`, "figures")))
        say("# %s: %d of %d cases agree, %d skipped; %d figures; the largest difference %.1f standard errors",
            name, sum(verdict == "ok"), length(of), sum(verdict == "skip"), figures, largest)
    }
}

main <- function() {
    start <- proc.time()[["elapsed"]]
    options <- read_options(commandArgs(trailingOnly = TRUE))
    cases <- Filter(function(case) grepl(options$only, case$name), all_cases())
    if (length(cases) == 0) give_up("no case is named like %s", options$only, status = 2L)
    samplers <- installed(options$samplers)
    jobs <- as.integer(Sys.getenv("JOBS", "2"))
    results <- parallel::mclapply(cases, run_case, samplers, mc.cores = jobs, mc.preschedule = FALSE)
    broken <- Filter(function(r) !is.list(r), results)
    for (b in broken) say("not ok - a case died: %s", paste(as.character(b), collapse = " "))
    results <- Filter(is.list, results)
    summary_lines(results, samplers)
    verdicts <- unlist(lapply(results, function(r) vapply(r, `[[`, "", "verdict")))
    if (options$only == "" && "base-r" %in% names(samplers))
        verdicts <- c(verdicts, run_wrong(cases[[5]], "Emax")$verdict, run_wrong(cases[[22]], "theta")$verdict)
    failed <- sum(verdicts == "not ok") + length(broken)
    say("# %.0f s", proc.time()[["elapsed"]] - start)
    say("%d passed, %d failed", sum(verdicts == "ok"), failed)
    quit(status = if (failed == 0) 0L else 1L)
}

main()
