# Statistics of R for tests/kernels, recorded once: Rscript tests/references/record_unit_root.R, in the root of the
# project. Needs the packages urca and tseries. Writes unit_root_series.csv and unit_root_r.csv beside this file.
suppressPackageStartupMessages({library(urca); library(tseries)})

data(nporg)
series <- list(
  Nile = list(as.numeric(Nile), "flow of the Nile at Aswan 1871-1970; R datasets, Nile"),
  sunspots = list(as.numeric(sunspot.year), "yearly sunspot numbers 1700-1988; R datasets, sunspot.year"),
  LakeHuron = list(as.numeric(LakeHuron), "level of Lake Huron 1875-1972, feet; R datasets, LakeHuron"),
  "log AirPassengers" = list(log(as.numeric(AirPassengers)),
                             "log of monthly airline passengers 1949-1960; R datasets, AirPassengers"),
  "log real GNP" = list(log(as.numeric(na.omit(nporg$gnp.r))),
                        "log of real GNP of the United States 1909-1970; Nelson and Plosser (1982), urca nporg")
)
here <- "tests/references"
versions <- sprintf("# %s, urca %s, tseries %s. Recorded by record_unit_root.R.", R.version.string,
                    packageVersion("urca"), packageVersion("tseries"))
number <- function(x) sprintf("%.17g", x)

out <- c(versions, sprintf("# %s: %s", names(series), sapply(series, function(one) one[[2]])), "series,value")
for (name in names(series)) out <- c(out, paste(name, number(series[[name]][[1]]), sep = ","))
writeLines(out, file.path(here, "unit_root_series.csv"))

rows <- c(versions, "referee,series,terms,lags,statistic,at")
add <- function(...) rows <<- c(rows, paste(..., sep = ","))
quiet <- function(x) suppressWarnings(x)
for (name in names(series)) {
  y <- series[[name]][[1]]
  n <- length(y)
  for (lags in c(0, 1, 4)) {
    for (terms in c("n", "c", "ct")) {
      type <- c(n = "none", c = "drift", ct = "trend")[[terms]]
      add("urca::ur.df", name, terms, lags, number(ur.df(y, type = type, lags = lags)@teststat[1]), "")
    }
    for (terms in c("c", "ct")) {
      model <- c(c = "constant", ct = "trend")[[terms]]
      add("urca::ur.ers", name, terms, lags,
          number(ur.ers(y, type = "DF-GLS", model = model, lag.max = lags)@teststat), "")
      type <- c(c = "mu", ct = "tau")[[terms]]
      add("urca::ur.kpss", name, terms, lags, number(ur.kpss(y, type = type, use.lag = lags)@teststat), "")
    }
    for (model in c("intercept", "trend", "both")) {
      # Its search covers every date; kept here: the smallest from int(0.15 n) + 1 to n - int(0.15 n).
      cut <- trunc(0.15 * n)
      ratios <- ur.za(y, model = model, lag = lags)@tstats
      dates <- (cut + 1):(n - cut)
      best <- dates[which.min(ratios[dates])]
      add("urca::ur.za", name, model, lags, number(ratios[best]), best)
    }
  }
  for (short in c(TRUE, FALSE)) {
    one <- PP.test(y, lshort = short)
    add("stats::PP.test", name, "ct", one$parameter, number(one$statistic), "")
    for (terms in c("c", "ct")) {
      one <- quiet(kpss.test(y, null = c(c = "Level", ct = "Trend")[[terms]], lshort = short))
      add("tseries::kpss.test", name, terms, one$parameter, number(one$statistic), "")
    }
  }
  one <- quiet(adf.test(y))
  add("tseries::adf.test", name, "ct", one$parameter, number(one$statistic), "")
}
writeLines(rows, file.path(here, "unit_root_r.csv"))
