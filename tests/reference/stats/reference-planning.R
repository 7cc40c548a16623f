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
