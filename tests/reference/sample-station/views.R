# The further views of ALPHA against BRAVO, worked in R from the units and heard-only rows: two-way clusters,
# other weights, the censored mean, the peek-proof line, pooling over nights, planning. By hand, in this folder:
#   npx tsx write-rows.ts /tmp/rows && Rscript views.R /tmp/rows
# Needs the packages sandwich, survival and jsonlite. Writes views.json.
suppressPackageStartupMessages({ library(sandwich); library(survival); library(jsonlite) })
rows_folder <- commandArgs(TRUE)[1]

# SNR limits straight from the spots and the switch log: inside a dwell, 20 s or more after its start.
limits_of <- function(set) {
  spots <- read.csv(paste0(set, "-spots.csv"))
  dwells <- read.csv(paste0(set, "-dwells.csv"))
  when <- function(text) as.numeric(as.POSIXct(text, format = "%Y-%m-%dT%H:%M:%OSZ", tz = "UTC"))
  spots$t <- when(spots$utc); dwells$from <- when(dwells$starts_at); dwells$to <- when(dwells$ends_at)
  spots$band <- ifelse(spots$khz < 2000, 160, ifelse(spots$khz < 4000, 80, 40))
  spots <- spots[!duplicated(spots[c("rx", "t", "call", "khz")]), ]
  tagged <- logical(nrow(spots))
  for (rx in unique(dwells$rx)) {
    d <- dwells[dwells$rx == rx, ]; d <- d[order(d$from), ]
    mine <- which(spots$rx == rx); at <- findInterval(spots$t[mine], d$from); inside <- at > 0
    tagged[mine[inside]] <- spots$t[mine[inside]] < d$to[at[inside]] & spots$t[mine[inside]] >= d$from[at[inside]] + 20
  }
  aggregate(snr_db ~ rx + band, spots[tagged, ], function(x) quantile(x, 0.02, names = FALSE))
}

# One column per receiver and band but the band's first receiver: +1 on A's side, -1 on B's.
offsets_of <- function(band, rxA, rxB, simultaneous, known) {
  columns <- list()
  for (b in sort(unique(band[simultaneous]))) for (rx in known[[as.character(b)]][-1])
    columns[[paste(b, rx)]] <- (band == b & simultaneous) * ((rxA == rx) - (rxB == rx))
  do.call(cbind, columns)
}

work <- function(set) {
  u <- read.csv(file.path(rows_folder, paste0(set, "-units.csv")))
  h <- read.csv(file.path(rows_folder, paste0(set, "-heard.csv")))
  limits <- limits_of(set)
  limit <- function(rx, band) limits$snr_db[match(paste(rx, band), paste(limits$rx, limits$band))]
  sim <- u$alternating == 0
  known <- lapply(split(u[sim, ], u$band[sim]), function(x) sort(unique(c(x$rxA, x$rxB))))
  Z <- offsets_of(u$band, u$rxA, u$rxB, sim, known)
  cluster <- paste(u$call, u$night)
  fit <- function(data_rows, weights = NULL, two_way = FALSE) {
    d <- u$d[data_rows]; z <- if (is.null(Z)) NULL else Z[data_rows, , drop = FALSE]
    w <- if (is.null(weights)) rep(1, length(d)) else weights[data_rows]
    m <- if (is.null(z)) lm(d ~ 1, weights = w) else lm(d ~ z, weights = w)
    id <- if (two_way) data.frame(call = u$call[data_rows], night = u$night[data_rows]) else cluster[data_rows]
    v <- vcovCL(m, cluster = id, type = "HC1", cadjust = TRUE)[1, 1]
    groups <- if (two_way) min(length(unique(id$call)), length(unique(id$night))) else length(unique(id))
    e <- unname(coef(m)[1]); se <- sqrt(v); t <- qt(0.975, groups - 1)
    list(estimate = e, se = se, lo = e - t * se, hi = e + t * se, units = length(d))
  }
  everything <- seq_len(nrow(u))
  counts <- table(u$call)
  heaviest <- names(counts)[order(-counts, names(counts))][1:5]
  one <- fit(everything)

  # The censored mean, receiver offsets fitted with it, clusters robust with the factor C/(C-1) (n-1)/(n-k).
  silent <- ifelse(h$side > 0, limit(h$rxB, h$band), limit(h$rxA, h$band))
  lower <- c(u$d, ifelse(h$side > 0, h$snr - silent, -Inf))
  upper <- c(u$d, ifelse(h$side > 0, Inf, silent - h$snr))
  band <- c(u$band, h$band); rxA <- c(u$rxA, h$rxA); rxB <- c(u$rxB, h$rxB)
  ZZ <- offsets_of(band, rxA, rxB, rxA != rxB, known)
  everyone <- c(cluster, paste(h$call, h$night))
  s <- Surv(ifelse(is.finite(lower), lower, NA), ifelse(is.finite(upper), upper, NA), type = "interval2")
  control <- survreg.control(rel.tolerance = 1e-13, maxiter = 200)
  cm <- if (is.null(ZZ)) survreg(s ~ 1, dist = "gaussian", cluster = everyone, robust = TRUE, control = control) else
    survreg(s ~ ZZ, dist = "gaussian", cluster = everyone, robust = TRUE, control = control)
  C <- length(unique(everyone)); n <- length(lower); k <- length(coef(cm))
  censored_se <- sqrt(vcov(cm)[1, 1] * C / (C - 1) * (n - 1) / (n - k))

  # Means of clusters with the offsets taken out, in order of time.
  m <- if (is.null(Z)) lm(u$d ~ 1) else lm(u$d ~ Z)
  corrected <- if (is.null(Z)) u$d else u$d - drop(Z %*% coef(m)[-1])
  means <- tapply(corrected, cluster, mean)
  first <- tapply(u$block, cluster, min); night <- tapply(u$night, cluster, min)
  # Equal first blocks: by first appearance among the units.
  seen <- match(names(means), unique(cluster))
  x <- unname(means[order(night, first, seen)]); nn <- unname(sort(night))
  alpha <- 0.05
  width <- function(t, rho) sqrt(2 * (t * rho^2 + 1) / (t^2 * rho^2) * log(sqrt(t * rho^2 + 1) / alpha))
  rho <- optimise(function(r) width(200, r), c(1e-4, 5), tol = 1e-14)$minimum
  at <- cumsum(table(nn))
  peek <- lapply(at, function(t) {
    sd <- sqrt(mean((x[1:t] - mean(x[1:t]))^2))
    sd1 <- sd(x[1:t])
    list(clusters = t, estimate = mean(x[1:t]), sdPopulation = sd * width(t, rho), sdSample = sd1 * width(t, rho))
  })

  # Paule-Mandel over the nights' cells, from one regression with an indicator a night.
  f <- factor(u$night)
  mn <- if (is.null(Z)) lm(u$d ~ 0 + f) else lm(u$d ~ 0 + f + Z)
  keep <- seq_along(levels(f))
  y <- unname(coef(mn)[keep]); v <- unname(diag(vcovCL(mn, cluster = cluster, type = "HC1", cadjust = TRUE))[keep])
  own <- tapply(cluster, f, function(id) length(unique(id))); C <- length(unique(cluster))
  # A cell rests on its own clusters: their factor in place of the whole picture's.
  v <- v * unname(own / (own - 1)) / (C / (C - 1))
  cells <- list(estimate = y, lo = y - qt(0.975, unname(own) - 1) * sqrt(v), hi = y + qt(0.975, unname(own) - 1) * sqrt(v))
  speaks <- own >= 8
  y <- y[speaks]; v <- v[speaks]
  excess <- function(tau2) { w <- 1 / (v + tau2); mu <- sum(w * y) / sum(w); sum(w * (y - mu)^2) - (length(y) - 1) }
  tau2 <- if (excess(0) <= 0) 0 else uniroot(excess, c(0, 1000), tol = 1e-14)$root
  w <- 1 / (v + tau2)

  spread <- one$se * sqrt(length(unique(cluster)))
  half <- function(h) uniroot(function(n) qt(0.975, n - 1) * spread / sqrt(n) - h, c(2.0001, 1e7), tol = 1e-9)$root
  list(
    oneWay = one, twoWay = fit(everything, two_way = TRUE),
    withoutHeaviest = fit(which(!(u$call %in% heaviest))),
    equalStations = fit(everything, weights = 1 / as.numeric(counts[u$call])),
    censored = list(estimate = unname(coef(cm)[1]), se = censored_se, sd = cm$scale,
      onlyA = sum(h$side > 0), onlyB = sum(h$side < 0)),
    cells = cells, limits = limits, peek = unname(peek),
    pooling = list(tau2 = tau2, mean = sum(w * y) / sum(w), cells = length(y)),
    planning = list(spread = spread, power = power.t.test(delta = 1, sd = spread, power = 0.8, type = "paired")$n,
      halfWidths = sapply(c(2, 1, 0.5, 0.25), half),
      detectable = power.t.test(n = length(unique(cluster)), sd = spread, power = 0.8, type = "paired")$delta))
}
writeLines(toJSON(list(swap = work("swap"), alternate = work("alternate")), auto_unbox = TRUE, digits = NA), "views.json")
