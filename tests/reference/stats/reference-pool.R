# Random-effects pooling: metafor::rma with DerSimonian-Laird and Paule-Mandel tau^2, normal and
# Hartung-Knapp intervals, and its shrunken cells (blup). Run by make-reference.R.
suppressPackageStartupMessages(library(metafor))
set.seed(20260116, kind = "Mersenne-Twister", normal.kind = "Inversion", sample.kind = "Rejection")

pool_case <- function(y, s, level) {
  control <- list(tol = 1e-14, maxiter = 10000, tau2.max = 1e12)
  one <- function(method, test, cells) {
    fit <- rma(y, sei = s, method = method, test = test, level = 100 * level, control = control)
    shrunk <- blup(fit, level = 100 * level)
    # Twelve digits of the many cells are plenty to compare to eight, and keep the file small.
    c(list(tau2 = fit$tau2, estimate = as.numeric(fit$beta), se = fit$se, p = fit$pval, lo = fit$ci.lb,
           hi = fit$ci.ub, q = fit$QE, qP = fit$QEp),
      if (cells) list(cells = I(signif(shrunk$pred, 12)), cellSe = I(signif(shrunk$se, 12)),
                      cellLo = I(signif(shrunk$pi.lb, 12)), cellHi = I(signif(shrunk$pi.ub, 12))))
  }
  list(y = y, s = s, level = level, dl = one("DL", "z", FALSE), pm = one("PM", "z", TRUE),
       dlKnapp = one("DL", "knha", TRUE), pmKnapp = one("PM", "knha", FALSE))
}
pooled <- lapply(1:220, function(i) {
  k <- c(2, 3, 5, 8, 13, 24, 40)[i %% 7 + 1]
  tau <- c(0, 0.3, 1, 4)[i %% 4 + 1]
  s <- round(switch(i %% 3 + 1, runif(k, 0.2, 2), rexp(k) + 0.05, rep(0.7, k)), 3)
  y <- switch(i %% 5 + 1,
    rnorm(k, 1, sqrt(s^2 + tau^2)), round(rnorm(k, 0, sqrt(s^2 + tau^2))), tau * rexp(k) + rnorm(k, 0, s),
    rcauchy(k), 500 + rnorm(k, 0, sqrt(s^2 + tau^2)))
  y <- round(y, 3)
  # Cells all equal have no Hartung-Knapp error to compare.
  if (length(unique(y)) == 1) y[1] <- y[1] + 1
  pool_case(y, s, c(0.95, 0.9, 0.99)[i %% 3 + 1])
})
write_cases("pool", pooled)
