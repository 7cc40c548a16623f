# Censored normal means: survival::survreg on rows that are exact, left-, right- or interval-censored, alone
# and with further columns; cluster-robust errors by its own robust = TRUE, cluster = (no small-sample factor).
# With interval-censored rows the scores of survival 3.5-3 do not sum to zero at its own maximum (the other
# kinds' do); there the sandwich is built from the scores of the written-out likelihood instead.
# Run by make-reference.R.
suppressPackageStartupMessages(library(survival))
written_out_sandwich <- function(fit, lower, upper, x, cluster) {
  s <- fit$scale
  m <- as.numeric(x %*% coef(fit))
  a <- (ifelse(is.na(lower), -Inf, lower) - m) / s
  b <- (ifelse(is.na(upper), Inf, upper) - m) / s
  mass <- ifelse(a > 0, pnorm(a, lower.tail = FALSE) - pnorm(b, lower.tail = FALSE), pnorm(b) - pnorm(a))
  times <- function(z) ifelse(is.finite(z), z, 0) * dnorm(z)
  by_mean <- ifelse(a == b, a, (dnorm(a) - dnorm(b)) / mass) / s
  by_log_sd <- ifelse(a == b, a^2 - 1, (times(a) - times(b)) / mass)
  scores <- cbind(by_mean * x, by_log_sd)
  stopifnot(max(abs(colSums(scores))) < 1e-6 * sum(abs(scores)))
  moved <- rowsum(scores, cluster) %*% vcov(fit)
  sqrt(diag(t(moved) %*% moved))
}
set.seed(20260115, kind = "Mersenne-Twister", normal.kind = "Inversion", sample.kind = "Rejection")

censored <- list()
while (length(censored) < 240) {
  i <- length(censored) + 1
  n <- c(6, 9, 15, 30, 60, 120)[i %% 6 + 1]
  if (i %in% c(100, 200)) n <- 1500
  kind <- c("plain", "whole", "skewed", "shifted")[i %% 4 + 1]
  width <- if (n < 15) 0 else i %% 3
  columns <- lapply(seq_len(width), function(j) sample(-1:1, n, TRUE) * 1)
  y <- switch(kind,
    plain = rnorm(n, runif(1, -2, 2), runif(1, 0.5, 6)),
    whole = round(rnorm(n, runif(1, -1, 1), 4)),
    skewed = 3 * rexp(n) - 1,
    shifted = 40000 + rnorm(n, 0, 0.3))
  for (column in columns) y <- y + 1.5 * column
  y <- round(y, 3)
  # Shares of left, right and interval censoring, from light to heavy.
  shares <- list(c(0.1, 0.1, 0), c(0.3, 0.3, 0), c(0.5, 0, 0), c(0, 0.6, 0), c(0.2, 0.2, 0.2), c(0, 0, 0.9))[[i %% 5 + 1 + (i %% 11 == 0)]]
  how <- sample(0:3, n, TRUE, c(1 - sum(shares), shares))
  gap <- round(rexp(n) * if (kind == "shifted") 0.2 else 2, if (kind == "whole") 0 else 3)
  # Narrow intervals too: rounding to a quarter of the spread and to a thousandth.
  narrow <- if (i %% 2) 0.001 else 0.5
  lower <- ifelse(how == 0, y, ifelse(how == 1, NA, ifelse(how == 2, y - gap, y - narrow)))
  upper <- ifelse(how == 0, y, ifelse(how == 1, y + gap, ifelse(how == 2, NA, y + narrow + gap * (gap > 1))))
  # A case R cannot fit is drawn anew: no exact value, or all on one side.
  if (sum(how %in% c(0, 3)) < 3 + width || length(unique(y[how == 0])) < 2) next
  cluster <- sample.int(max(3, n %/% 3), n, TRUE) - 1L
  if (length(unique(cluster)) < 2) next
  level <- c(0.95, 0.9, 0.99)[i %% 3 + 1]
  data <- data.frame(lower, upper)
  for (j in seq_len(width)) data[[paste0("z", j)]] <- columns[[j]]
  formula <- reformulate(c("1", if (width) paste0("z", seq_len(width))),
                         response = quote(Surv(lower, upper, type = "interval2")))
  control <- survreg.control(maxiter = 200, rel.tolerance = 1e-13)
  failed <- FALSE
  note <- function(w) { failed <<- TRUE; invokeRestart("muffleWarning") }
  fit <- tryCatch(withCallingHandlers(
    survreg(formula, data = data, dist = "gaussian", control = control), warning = note), error = function(e) NULL)
  if (failed || is.null(fit) || fit$scale < 0.02 * sd(y)) next
  robust <- if (any(how == 3)) {
    written_out_sandwich(fit, lower, upper, do.call(cbind, c(list(rep(1, n)), columns)), cluster)
  } else {
    sqrt(diag(vcov(survreg(formula, data = data, dist = "gaussian", control = control, robust = TRUE, cluster = cluster))))
  }
  se <- sqrt(diag(vcov(fit)))
  # So few clusters that their scores cancel: no error to compare.
  if (any(robust < 1e-6 * se)) next
  reach <- qnorm(1 - (1 - level) / 2) * se[1]
  censored[[i]] <- list(lower = lower, upper = upper, columns = columns, cluster = cluster, level = level,
    estimate = unname(coef(fit)), se = unname(se[seq_len(width + 1)]), logSdSe = unname(se[width + 2]), sd = fit$scale,
    logLikelihood = fit$loglik[2], interval = unname(c(coef(fit)[1] - reach, coef(fit)[1] + reach)),
    p = unname(2 * pnorm(-abs(coef(fit)[1] / se[1]))),
    robust = unname(robust))
}
censored <- lapply(censored, function(case) {
  case$columns <- I(case$columns)
  case$estimate <- I(case$estimate)
  case$se <- I(case$se)
  case
})
write_cases("censored-mean", censored)
