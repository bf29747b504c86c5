# Estimates and likelihoods of R's arima for tests/kernels, recorded once: Rscript tests/references/record_arma.R, in the
# root of the project. Needs base R alone. Writes arma_series.csv and arma_r.csv beside this file.
# The search is told to go on far longer than by default, whose estimates are good to three or four digits.
# A model of differences is also fitted to the series differenced before: R starts differences with a large variance
# instead of a diffuse law, which is felt in the fourth digit.
series <- list(
  lh = list(lh, "luteinizing hormone in blood at ten-minute intervals; R datasets, lh; Diggle (1990), table A.1"),
  LakeHuron = list(LakeHuron, "level of Lake Huron 1875-1972, feet; R datasets, LakeHuron; Brockwell and Davis (1991)"),
  USAccDeaths = list(USAccDeaths, "monthly accidental deaths in the United States 1973-1978; R datasets, USAccDeaths"),
  presidents = list(presidents, "quarterly approval of US presidents 1945-1974, six quarters missing; R datasets, presidents")
)
here <- "tests/references"
versions <- sprintf("# %s, package stats. Recorded by record_arma.R.", R.version.string)
number <- function(x) ifelse(is.na(x), "", sprintf("%.17g", x))

out <- c(versions, sprintf("# %s: %s", names(series), sapply(series, function(one) one[[2]])), "series,value")
for (name in names(series)) out <- c(out, paste(name, number(as.numeric(series[[name]][[1]])), sep = ","))
writeLines(out, file.path(here, "arma_series.csv"))

rows <- c(versions, "referee,series,p,d,q,P,D,Q,period,mean,quantity,value")
add <- function(name, order, seasonal, period, mean, quantity, value)
  rows <<- c(rows, paste(c("stats::arima", name, order, seasonal, period, as.integer(mean), quantity, number(value)),
                         collapse = ","))
record <- function(name, x, order, seasonal = c(0, 0, 0), period = 1, at) {
  mean <- order[2] == 0 && seasonal[2] == 0 && name != "USAccDeaths differenced"
  season <- list(order = seasonal, period = if (period > 1) period else NA)
  model <- function(...) arima(x, order, season, include.mean = mean, method = "ML",
                               optim.control = list(reltol = 1e-13, maxit = 2000), ...)
  found <- model()
  for (quantity in names(coef(found))) {
    add(name, order, seasonal, period, mean, quantity, coef(found)[[quantity]])
    add(name, order, seasonal, period, mean, paste("s.e.", quantity), sqrt(diag(vcov(found)))[[quantity]])
  }
  add(name, order, seasonal, period, mean, "variance", found$sigma2)
  add(name, order, seasonal, period, mean, "log likelihood", found$loglik)
  there <- model(fixed = c(at, if (mean) NA), transform.pars = FALSE)
  add(name, order, seasonal, period, mean, paste(c("log likelihood at", at), collapse = " "), there$loglik)
}

record("lh", lh, c(1, 0, 0), at = 0.3)
record("lh", lh, c(3, 0, 0), at = c(0.5, 0.1, -0.3))
record("LakeHuron", LakeHuron, c(2, 0, 0), at = c(0.9, -0.1))
record("LakeHuron", LakeHuron, c(1, 0, 1), at = c(0.5, 0.5))
record("USAccDeaths", USAccDeaths, c(0, 1, 1), c(0, 1, 1), 12, at = c(-0.3, -0.7))
record("USAccDeaths differenced", diff(diff(USAccDeaths, 12)), c(0, 0, 1), c(0, 0, 1), 12, at = c(-0.3, -0.7))
record("presidents", presidents, c(1, 0, 0), at = 0.7)
record("presidents", presidents, c(3, 0, 0), at = c(0.6, 0.2, -0.1))
record("presidents", presidents, c(1, 0, 0), c(1, 0, 0), 4, at = c(0.7, 0.2))
writeLines(rows, file.path(here, "arma_r.csv"))
