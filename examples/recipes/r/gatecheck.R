# Declare results of R as result records. Needs base R and the package jsonlite.
#
#   declare(t.test(extra ~ group, data = sleep), id = "sleep/drugs", claim = "...",
#           sample = list(unit = "patient", n = 20))
#
# `result` is what a test returns (class htest), or a fit of lm with `coefficient`. Members of `test`, `estimate` and
# `sample` that are given are laid over what the result tells.

# The names that R gives to the statistics whose distribution the format knows.
statistics <- c(t = "t", z = "z", "X-squared" = "chi2", F = "F")

of_htest <- function(result) {
  test <- list(name = trimws(result$method), p = result$p.value)
  if (grepl("exact", test$name, ignore.case = TRUE)) test$p_kind <- "exact"
  test <- c(test, of_statistic(result$statistic, result$parameter, result$alternative))
  list(test = test, estimate = of_means(result))
}

# Fisher's exact test has no statistic. An F with an alternative is a ratio of two variances, whose p is no upper tail.
of_statistic <- function(statistic, df, alternative) {
  symbol <- if (is.null(statistic)) "" else names(statistic)
  known <- symbol %in% names(statistics) && !(symbol == "F" && !is.null(alternative))
  one_way <- symbol %in% c("X-squared", "F") && known
  c(
    if (known) list(statistic = statistics[[symbol]], value = unname(statistic), df = unname(df)),
    if (symbol != "" && !known) list(named_statistic = list(symbol = symbol, value = unname(statistic))),
    if (!is.null(alternative) && !one_way) switch(
      alternative, two.sided = list(sides = 2L), list(sides = 1L, tail = alternative))
  )
}

# A t test of two groups gives their means; its estimate is their difference.
of_means <- function(result) {
  means <- unname(result$estimate)
  if (!identical(names(result$statistic), "t") || is.null(result$stderr)) return(NULL)
  paired <- grepl("Paired", result$method)
  value <- if (length(means) == 2) means[[1]] - means[[2]] else means[[1]]
  list(measure = if (length(means) == 2 || paired) "mean difference" else "mean", value = value,
       null = unname(result$null.value), standard_error = result$stderr, interval = limits(result$conf.int))
}

limits <- function(interval, level = attr(interval, "conf.level")) {
  ends <- list(low = interval[[1]], high = interval[[2]])
  c(list(level = level), Filter(is.finite, ends))  # an end that is left out is unbounded
}

of_coefficient <- function(fit, coefficient) {
  row <- summary(fit)$coefficients[coefficient, ]
  list(
    test = list(name = "t test of a coefficient", statistic = "t", value = row[["t value"]],
                df = fit$df.residual, p = row[["Pr(>|t|)"]], sides = 2L),
    estimate = list(measure = paste("coefficient of", coefficient), value = row[["Estimate"]],
                    standard_error = row[["Std. Error"]],
                    interval = limits(confint(fit, coefficient, level = 0.95), level = 0.95)),
    sample = list(n = nobs(fit))
  )
}

record <- function(result, id, claim = NULL, status = "exploratory", role = "other", coefficient = NULL,
                   test = list(), estimate = list(), sample = list(), code = NULL) {
  told <- if (inherits(result, "lm")) of_coefficient(result, coefficient) else of_htest(result)
  software <- list(R = paste(R.version$major, R.version$minor, sep = "."))
  laid_over <- function(derived, given) {
    both <- modifyList(as.list(derived), given)
    if (length(both) > 0) both
  }
  parts <- list(gatecheck = "record/1", id = id, claim = claim, status = status, role = role,
                test = laid_over(told$test, test), estimate = laid_over(told$estimate, estimate),
                sample = laid_over(told$sample, sample), provenance = list(code = code, software = software))
  without_null(parts)
}

# An absent field is left out, since jsonlite would write NULL as an empty object.
without_null <- function(part) {
  if (!is.list(part)) return(part)
  lapply(Filter(Negate(is.null), part), without_null)
}

as_json <- function(record) {
  numbers <- unlist(rapply(record, identity, classes = "numeric", how = "list"))
  if (anyNA(unlist(record)) || !all(is.finite(numbers))) stop("the record of ", record$id, " holds a value that is not finite")
  # digits = NA keeps 15 significant digits: by default jsonlite writes four decimals, and a p of 0.00004 becomes 0.
  jsonlite::toJSON(record, auto_unbox = TRUE, digits = NA, pretty = 2)
}

declare <- function(result, id, ..., folder = "results") {
  path <- file.path(folder, paste0(id, ".record.json"))
  text <- as_json(record(result, id, ...))
  dir.create(dirname(path), recursive = TRUE, showWarnings = FALSE)
  beside <- paste0(path, ".tmp")
  writeLines(enc2utf8(trimws(text)), beside, useBytes = TRUE)
  invisible(file.rename(beside, path))
}
