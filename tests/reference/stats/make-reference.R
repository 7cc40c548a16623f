# Reference values for shared/stats, from R. Run by hand in this folder: Rscript make-reference.R
# Needs the packages sandwich, coin, survival, metafor, gsl and jsonlite (Debian: r-cran-<name>). The tests
# read the JSON files written here; R itself is not needed to run them. Everything is drawn from fixed seeds, so a
# second run writes the same files: regenerate.mjs runs this elsewhere and compares. It takes about two minutes.
suppressPackageStartupMessages({
  library(sandwich)
  library(coin)
  library(jsonlite)
})
set.seed(20260114, kind = "Mersenne-Twister", normal.kind = "Inversion", sample.kind = "Rejection")

write_cases <- function(name, cases) {
  writeLines(toJSON(cases, auto_unbox = TRUE, digits = NA, na = "null", null = "null"), paste0(name, ".json"))
  cat(name, length(cases), "cases\n")
}

# ---- distributions: both tails, and the quantile found back from the smaller tail ------------------
distributions <- list()
tails <- function(fn, x, args, p, q) {
  lower <- do.call(p, c(list(x), args))
  upper <- do.call(p, c(list(x), args, list(lower.tail = FALSE)))
  found <- function(probability, lower_tail) {
    if (is.null(q) || probability < 1e-290 || probability > 1 - 1e-9) return(NULL)
    do.call(q, c(list(probability), args, list(lower.tail = lower_tail)))
  }
  side <- if (lower <= upper) "lower" else "upper"
  distributions[[length(distributions) + 1]] <<- list(
    fn = fn, x = x, args = unname(unlist(args)), lower = lower, upper = upper, side = side,
    quantile = found(if (side == "lower") lower else upper, side == "lower"))
}
for (z in c(seq(-37, 37, by = 0.5), 0.001, 1e-5, 0.6744, 0.6745, 5.656, 5.657, 38))
  tails("normal", z, list(), pnorm, qnorm)
for (df in c(1, 2, 3, 4.5, 7, 12, 29, 60, 150, 1000, 25000))
  for (t in c(-60, -12, -4, -1.7, -0.3, 0.0004, 0.2, 0.9, 1.5, 2.3, 3.1, 5, 9, 25, 300))
    tails("t", t, list(df), pt, qt)
for (df in c(0.5, 1, 2, 3, 6, 11, 30, 84, 500, 10000))
  for (u in c(0.01, 0.2, 0.7, 0.95, 1, 1.1, 1.5, 3, 8, 20))
    tails("chiSquared", signif(df * u, 6), list(df), pchisq, qchisq)
for (d1 in c(1, 2, 5, 20, 83)) for (d2 in c(1, 3, 10, 60, 900))
  for (f in c(0.02, 0.4, 0.97, 1.3, 2.5, 6, 30)) tails("f", f, list(d1, d2), pf, qf)
for (a in c(0.5, 1, 2, 7.5, 40, 800)) for (b in c(0.5, 1, 3, 25, 300))
  for (x in c(0.001, 0.05, 0.3, 0.5, 0.8, 0.99)) tails("beta", x, list(a, b), pbeta, qbeta)
for (n in c(1, 2, 9, 30, 200, 5000)) for (p in c(0.5, 0.1, 0.003))
  for (k in unique(round(n * p + c(-6, -2, -0.5, 0, 0.5, 2, 5) * sqrt(n * p * (1 - p)))))
    if (k >= 0 && k <= n) {
      tails("binomial", k, list(n, p), pbinom, NULL)
      last <- length(distributions)
      distributions[[last]]$pmf <- dbinom(k, n, p)
      distributions[[last]]$median <- qbinom(c(0.025, 0.5, 0.975), n, p)
    }
write_cases("distributions", distributions)

# ---- paired differences: t, signed rank, Hodges-Lehmann, sign test, equivalence ---------------------
draw <- function(kind, n) switch(kind,
  plain = round(rnorm(n, runif(1, -1, 1), runif(1, 0.5, 5)), 4),
  whole = round(rnorm(n, runif(1, -1, 1), runif(1, 1, 6))),
  skewed = round(rexp(n) * 3 - runif(1, 0, 4), 4),
  wild = round(rcauchy(n, 0.3), 3),
  halves = round(2 * rnorm(n, 0.4, 1.2)) / 2)
kinds <- c("plain", "whole", "skewed", "wild", "halves")
sizes <- c(rep(2:12, each = 10), rep(c(15, 20, 25, 33, 48, 49, 50, 60, 80), each = 10), rep(c(150, 240), each = 10))
paired <- list()
for (i in seq_along(sizes)) {
  n <- sizes[i]
  repeat {
    d <- draw(kinds[(i - 1) %% 5 + 1], n)
    if (length(unique(d)) > 1 && sum(d != 0) > 0) break
  }
  level <- c(0.95, 0.9, 0.99)[i %% 3 + 1]
  margin <- c(1, 0.5, 2)[(i %/% 3) %% 3 + 1]
  t <- t.test(d, conf.level = level)
  nz <- d[d != 0]
  clean <- length(nz) == n && !any(duplicated(abs(nz)))
  normal_p <- sapply(c("two.sided", "greater", "less"), function(side)
    suppressWarnings(wilcox.test(d, exact = FALSE, correct = TRUE, alternative = side)$p.value))
  exact_p <- function(zero) sapply(c("two.sided", "greater", "less"), function(side) {
    if (clean) wilcox.test(d, exact = TRUE, alternative = side)$p.value
    else as.numeric(pvalue(wilcoxsign_test(d ~ rep(0, n), zero.method = zero, alternative = side,
                                           distribution = exact())))
  })
  walsh <- outer(d, d, "+") / 2
  walsh <- sort(walsh[!lower.tri(walsh)])
  if (clean) {
    w <- suppressWarnings(wilcox.test(d, exact = TRUE, conf.int = TRUE, conf.level = level))
    hl <- c(unname(w$estimate), w$conf.int)
  } else {
    k <- max(1, qsignrank((1 - level) / 2, n))
    hl <- c(median(walsh), walsh[k], walsh[length(walsh) + 1 - k])
  }
  k <- max(1, qsignrank((1 - level) / 2, n))
  sign <- binom.test(sum(d > 0), sum(d != 0), conf.level = level)
  paired[[i]] <- list(
    d = d, level = level, margin = margin,
    t = c(mean(d), sd(d), unname(t$statistic), unname(t$parameter), t$p.value, t$conf.int),
    w = unname(suppressWarnings(wilcox.test(d, exact = FALSE)$statistic)),
    exact = if (n <= 80) unname(exact_p("Wilcoxon")), pratt = if (n <= 80) unname(exact_p("Pratt")),
    normal = unname(normal_p),
    hl = hl, achieved = 1 - 2 * psignrank(k - 1, n),
    sign = c(sign$p.value, sign$conf.int,
             binom.test(sum(d > 0), length(nz), alternative = "greater")$p.value,
             binom.test(sum(d > 0), length(nz), alternative = "less")$p.value),
    tost = c(t.test(d, mu = -margin, alternative = "greater")$p.value,
             t.test(d, mu = margin, alternative = "less")$p.value, t.test(d, conf.level = 0.9)$conf.int))
}
write_cases("paired", paired)

# Beyond a thousand: normal approximation of the test; and the exact test at its limit.
large <- lapply(1:4, function(i) {
  n <- c(1000, 1000, 1200, 1500)[i]
  repeat {
    d <- if (i == 4) round(rnorm(n, 0.2, 3)) else sample.int(4 * n, n) / 1000 * sample(c(-1, 1), n, TRUE, c(0.47, 0.53))
    if (i == 4 || (!any(d == 0) && !any(duplicated(abs(d))))) break
  }
  list(d = d, exact = n == 1000, p = sapply(c("two.sided", "greater", "less"), function(side)
    suppressWarnings(wilcox.test(d, exact = n == 1000, alternative = side)$p.value)))
})
large <- lapply(large, function(case) { case$p <- unname(case$p); case })
write_cases("signed-rank-large", large)

# ---- McNemar ------------------------------------------------------------------------------------------
mcnemar <- list()
pairs <- unique(rbind(
  expand.grid(b = 0:8, c = 0:8)[-1, ],
  data.frame(b = rpois(100, 30), c = rpois(100, 25)),
  data.frame(b = rpois(60, 400), c = rpois(60, 430)),
  data.frame(b = c(86, 0, 60, 5000), c = c(150, 60, 0, 5200))))
for (i in seq_len(nrow(pairs))) {
  b <- pairs$b[i]
  c <- pairs$c[i]
  level <- c(0.95, 0.9, 0.99)[i %% 3 + 1]
  exact <- binom.test(b, b + c, conf.level = level)
  table <- matrix(c(10, c, b, 10), 2)
  plain <- mcnemar.test(table, correct = FALSE)
  corrected <- mcnemar.test(table, correct = TRUE)
  here <- dbinom(min(b, c), b + c, 0.5)
  mid <- if (b == c) 1 - here / 2 else 2 * pbinom(min(b, c), b + c, 0.5) - here
  mcnemar[[i]] <- list(b = b, c = c, level = level, exact = exact$p.value, mid = mid, share = exact$conf.int[1:2],
    chi = c(unname(plain$statistic), plain$p.value), corrected = c(unname(corrected$statistic), corrected$p.value))
}
write_cases("mcnemar", mcnemar)

# ---- Benjamini-Hochberg -------------------------------------------------------------------------------
bh <- lapply(1:220, function(i) {
  m <- c(1, 2, 3, 5, 8, 15, 24, 60)[i %% 8 + 1]
  p <- switch(i %% 4 + 1, runif(m), rbeta(m, 0.3, 2), round(runif(m), 1), signif(10^(-8 * runif(m)), 4))
  p <- signif(p, 8)
  adjusted <- p.adjust(p, "BH")
  list(p = I(p), adjusted = I(adjusted), rejected = sum(adjusted <= 0.05))
})
write_cases("benjamini-hochberg", bh)

# ---- cluster regression -------------------------------------------------------------------------------
regression <- list()
fit_case <- function(x, y, cluster, second, weights, level) {
  data <- list(y = y, x = x)
  w <- if (is.null(weights)) rep(1, length(y)) else weights
  m <- lm(y ~ 0 + x, weights = w)
  by <- if (is.null(second)) cluster else data.frame(cluster, second)
  v <- vcovCL(m, cluster = by, type = "HC1", cadjust = TRUE)
  counts <- c(length(unique(cluster)), if (!is.null(second)) length(unique(second)))
  df <- min(counts) - 1
  b <- coef(m)
  kept <- which(!is.na(b))
  se <- rep(NA_real_, length(b))
  se[kept] <- suppressWarnings(sqrt(diag(v)))
  naive <- rep(NA_real_, length(b))
  naive[kept] <- sqrt(diag(vcov(m))[kept])
  s <- svd(x, nv = ncol(x))
  rank <- sum(s$d > 1e-9 * s$d[1])
  null <- if (rank < ncol(x)) s$v[, (rank + 1):ncol(x), drop = FALSE] else matrix(0, ncol(x), 1)
  estimable <- apply(abs(null), 1, max) < 1e-9
  b[!estimable] <- NA
  se[!estimable] <- NA
  q <- qt(1 - (1 - level) / 2, df)
  contrast <- NULL
  if (all(estimable) && ncol(x) > 1) {
    e <- c(1, rep(0, ncol(x) - 2), -1)
    variance <- as.numeric(t(e) %*% v %*% e)
    if (variance > 0) contrast <- c(sum(e * b), sqrt(variance))
  }
  list(df = df, rank = rank, estimate = I(unname(b)), se = I(unname(se)), p = I(unname(2 * pt(-abs(b / se), df))),
       lo = I(unname(b - q * se)), hi = I(unname(b + q * se)), naive = I(unname(naive)), contrast = contrast)
}
offsets <- function(n, receivers) {
  # +1 for the receiver on A's side, -1 for the one on B's, the last receiver is the reference.
  z <- matrix(0, n, receivers)
  a <- sample.int(receivers, n, TRUE)
  b <- sample.int(receivers, n, TRUE)
  z[cbind(1:n, a)] <- z[cbind(1:n, a)] + 1
  z[cbind(1:n, b)] <- z[cbind(1:n, b)] - 1
  z[, -receivers, drop = FALSE]
}
for (i in 1:260) {
  kind <- c("mean", "cells", "dense", "deficient")[i %% 4 + 1]
  n <- c(24, 30, 40, 60, 120)[i %% 5 + 1]
  if (i %in% c(101, 202)) n <- 900
  clusters <- max(5, round(n / c(2, 4, 6)[i %% 3 + 1]))
  level <- c(0.95, 0.9, 0.99)[i %% 3 + 1]
  repeat {
    cluster <- sample.int(clusters, n, TRUE) - 1L
    second <- if (i %% 7 < 3) sample.int(max(3, clusters %/% 3), n, TRUE) - 1L
    weights <- if (i %% 6 == 0) round(runif(n, 0.1, 3), 2)
    cells <- NULL
    cell_count <- 0
    if (kind == "mean") {
      x <- matrix(1, n, 1)
    } else if (kind == "dense") {
      x <- cbind(1, round(matrix(rnorm(2 * n), n), 2), offsets(n, 3))
    } else {
      cell_count <- c(2, 3, 5)[i %% 3 + 1]
      cells <- sample.int(cell_count, n, TRUE) - 1L
      z <- offsets(n, 3)
      # One receiver used in one cell only, and always: the cell and the receiver cannot be told apart.
      if (kind == "deficient") z <- cbind(z, as.numeric(cells == 0))
      if (kind == "deficient" && i %% 8 == 3) z <- cbind(z, z[, 1] + z[, 2])
      x <- cbind(outer(cells, 0:(cell_count - 1), "==") * 1, z)
    }
    if (cell_count == 0) break
    spread <- table(factor(cells, levels = seq_len(cell_count) - 1), cluster) > 0
    if (all(rowSums(spread) >= 2)) break
  }
  effect <- rnorm(clusters)[cluster + 1]
  y <- round(as.numeric(x %*% rnorm(ncol(x))) + effect + rnorm(n, 0, 2), if (i %% 2) 3 else 0)
  if (i %% 10 == 5) y <- y + 50000
  expected <- fit_case(x, y, cluster, second, weights, level)
  dense <- if (is.null(cells)) x else x[, -seq_len(cell_count), drop = FALSE]
  columns <- lapply(seq_len(ncol(dense)), function(j) dense[, j])
  regression[[i]] <- c(list(kind = kind, level = level, y = y, cluster = cluster, second = second, weights = weights,
    cells = cells, cellCount = cell_count, columns = columns), expected)
}
write_cases("cluster-regression", regression)

# ---- the other estimators, each with a seed of its own ---------------------------------------------------
for (part in c("reference-ranks.R", "reference-clusters.R", "reference-censored.R", "reference-pool.R", "reference-planning.R",
                "reference-monitoring.R")) source(part)
