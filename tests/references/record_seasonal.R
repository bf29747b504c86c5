# Records what the R packages uroot and strucchange say of a few series, and the published tables that uroot carries.
# Run once from the root of the project: Rscript tests/references/record_seasonal.R
# The tests read the record, tests/references/seasonal.json, and need no R.
suppressMessages({
  library(uroot)
  library(strucchange)
  library(jsonlite)
})
set.seed(1995)

walk <- function(s, n) diffinv(rnorm(n - s), s, xi = rnorm(s))
pattern <- function(s, n) rep_len(3 * cos(2 * pi * seq_len(s) / s) + rnorm(s), n) + arima.sim(list(ar = 0.4), n)
made <- list(
  quarterly_walk = ts(walk(4, 80), frequency = 4),
  quarterly_pattern = ts(0.02 * seq_len(81) + pattern(4, 81), frequency = 4, start = c(2001, 2)),
  monthly_walk = ts(0.1 * seq_len(132) + walk(12, 132), frequency = 12),
  monthly_pattern = ts(cumsum(rnorm(144)) + pattern(12, 144), frequency = 12, start = c(2001, 5)),
  weekday_walk = ts(walk(7, 105), frequency = 7),
  weekday_pattern = ts(pattern(7, 111), frequency = 7)
)
made <- lapply(made, function(x) ts(round(as.numeric(x), 6), frequency = frequency(x), start = start(x)))

hegy <- list()
for (name in names(made)) for (terms in c("100", "110", "101", "111"))
  for (choice in c("fixed 0", "fixed 3", "AIC 6", "BIC 6")) {
    deterministic <- as.integer(strsplit(terms, "")[[1]])
    method <- sub(" .*", "", choice)
    found <- hegy.test(made[[name]], deterministic, method, as.integer(sub(".* ", "", choice)),
      "RS")
    hegy[[length(hegy) + 1]] <- list(series = name, terms = terms, choice = choice, lags = found$lag.order,
      nobs = length(residuals(found$fitted.model)), statistics = unname(found$statistics),
      p_values = unname(found$pvalues))
  }

ch <- list()
for (name in names(made)) for (lag1 in c(FALSE, TRUE)) for (order in c(0, 3, 8)) for (trend in c(FALSE, TRUE)) {
  x <- made[[name]]
  line <- if (trend) cbind(line = seq_along(x)) else NULL
  found <- ch.test(x, "trigonometric", lag1, order, xreg = line, pvalue = "raw")
  ch[[length(ch) + 1]] <- list(series = name, lag1 = lag1, bandwidth = order, trend = trend,
    statistics = unname(found$statistics))
}

shift <- lapply(c(nile = "nile", made = "made"), function(name) {
  y <- if (name == "nile") as.numeric(datasets::Nile) else round(rnorm(90) + 1.2 * (seq_len(90) > 55), 6)
  found <- breakpoints(y ~ 1, breaks = 1, h = 0.1)
  interval <- function(level) as.vector(confint(found, level = level, het.err = FALSE)$confint)
  list(y = y, breakpoint = found$breakpoints, at95 = interval(0.95), at90 = interval(0.9), at99 = interval(0.99))
})

table_of <- function(name) {
  x <- get(name, asNamespace("uroot"))
  list(dimnames = unname(dimnames(x)), values = as.vector(x))
}
record <- list(
  versions = list(R = R.version.string, uroot = as.character(packageVersion("uroot")),
    strucchange = as.character(packageVersion("strucchange"))),
  series = lapply(made, function(x) list(period = frequency(x), values = as.numeric(x))),
  hegy = hegy, canova_hansen = ch, shift = shift,
  tables = list(hegy = table_of(".HEGY.orig.cv"), monthly = table_of(".BM.orig.cv"), stability = table_of(".CH.orig.cv"))
)
write(toJSON(record, digits = NA, auto_unbox = TRUE, null = "null"), "tests/references/seasonal.json")
