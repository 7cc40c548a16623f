# Confidence sequences: running means and standard deviations by mean() and sd() of every start of the list, the
# formula written out anew, rho from gsl's Lambert W on its lower branch. Run by make-reference.R.
suppressPackageStartupMessages(library(gsl))
set.seed(20260117, kind = "Mersenne-Twister", normal.kind = "Inversion", sample.kind = "Rejection")

sequences <- lapply(1:220, function(i) {
  n <- c(3, 8, 9, 14, 30, 45)[i %% 6 + 1]
  if (i %in% c(77, 177)) n <- 2500
  d <- switch(i %% 5 + 1, rnorm(n, 1, 2), round(rnorm(n, 0, 2)), rexp(n) - 0.5, rcauchy(n), 30000 + rnorm(n, 0, 0.5))
  d <- round(d, 3)
  level <- c(0.95, 0.9, 0.99)[i %% 3 + 1]
  alpha <- 1 - level
  from <- c(2, 8, 5)[i %% 3 + 1]
  tuned <- if (i %% 4 > 0) c(10, 50, 200)[i %% 3 + 1]
  rho <- if (is.null(tuned)) round(runif(1, 0.05, 1), 3) else sqrt((-lambert_Wm1(-alpha^2 / exp(1)) - 1) / tuned)
  at <- if (n > 100) c(2, 7, 8, 100, 999, 2500) else seq_len(n)
  line <- t(sapply(at, function(t) {
    s <- if (t < 2) 0 else sd(d[1:t])
    m <- mean(d[1:t])
    w <- s * sqrt(2 * (t * rho^2 + 1) / (t^2 * rho^2) * log(sqrt(t * rho^2 + 1) / alpha))
    if (t < from || s == 0) c(m, NA, NA) else c(m, m - w, m + w)
  }))
  list(d = d, level = level, from = from, tuned = tuned, rho = rho, at = at, mean = I(line[, 1]), lo = I(line[, 2]),
       hi = I(line[, 3]))
})
write_cases("confidence-sequence", sequences)

# ---- sample sizes: power.t.test(type = "paired") with its root tolerance tightened to 1e-12 ------------------
plans <- lapply(1:240, function(i) {
  sd <- round(runif(1, 0.3, 8), 3)
  level <- c(0.95, 0.9, 0.99)[i %% 3 + 1]
  power <- round(runif(1, 0.15, 0.99), 3)
  difference <- round(sd * exp(runif(1, log(0.01), log(1.2))), 4)
  n <- if (i %% 2) sample(2:40, 1) else round(exp(runif(1, log(2), log(20000))), 2)
  strict <- i %% 5 == 0
  ask <- function(...) power.t.test(..., sd = sd, sig.level = 1 - level, type = "paired", strict = strict, tol = 1e-12)
  # R searches n from 2 up and fails where two values are enough.
  needed <- tryCatch(ask(delta = difference, power = power)$n, error = function(e) NULL)
  half <- round(sd * exp(runif(1, log(0.02), log(2))), 4)
  width <- function(n) qt(1 - (1 - level) / 2, n - 1) * sd / sqrt(n)
  # Beyond a noncentrality of 37.62 pt() itself is a rough approximation.
  detectable <- ask(n = n, power = power)$delta
  if (sqrt(n) * detectable / sd > 37) detectable <- NULL
  list(sd = sd, level = level, power = power, difference = difference, n = n, strict = strict, needed = needed,
       reached = ask(delta = difference, n = n)$power, detectable = detectable, half = half,
       forHalf = if (width(2) > half) uniroot(function(n) width(n) - half, c(2, 1e7), tol = 1e-12)$root, width = width(n))
})
write_cases("sample-size", plans)

# ---- noncentral t; R's own series stops at 1e-12 -------------------------------------------------------------
noncentral <- list()
for (df in c(1, 2, 3.5, 7, 29, 127.3, 1000)) for (ncp in c(-4, -0.7, 0.5, 2.8, 9, 30))
  for (t in c(-6, -1.5, 0, 0.4, 1.98, 4, 12, 35))
    noncentral[[length(noncentral) + 1]] <- list(t = t, df = df, ncp = ncp, lower = suppressWarnings(pt(t, df, ncp)),
      upper = suppressWarnings(pt(t, df, ncp, lower.tail = FALSE)))
write_cases("noncentral-t", noncentral)
