# CUSUM sums by Reduce, moving averages by the recursive filter of stats. Run by make-reference.R.
set.seed(20260118, kind = "Mersenne-Twister", normal.kind = "Inversion", sample.kind = "Rejection")

charts <- lapply(1:220, function(i) {
  n <- c(1, 2, 5, 12, 30, 60)[i %% 6 + 1]
  if (i == 200) n <- 3000
  target <- c(0, 325, -12.5)[i %% 3 + 1]
  x <- target + switch(i %% 4 + 1, rnorm(n), round(rnorm(n, 0.4, 2)), rexp(n) - 1, rnorm(n, seq(0, 1, length.out = n)))
  x <- round(x, 3)
  k <- c(0.25, 0.5, 0)[i %% 3 + 1]
  h <- c(2, 4, 5.5)[i %% 3 + 1]
  head <- if (i %% 2) h / 2 else 0
  high <- Reduce(function(s, v) max(0, s + v - target - k), x, head, accumulate = TRUE)[-1]
  low <- Reduce(function(s, v) max(0, s + target - k - v), x, head, accumulate = TRUE)[-1]
  out <- which(high > h | low > h)
  lambda <- c(0.05, 0.2, 0.3, 1)[i %% 4 + 1]
  mean <- as.numeric(stats::filter(lambda * x, 1 - lambda, method = "recursive", init = target))
  reach <- 3 * 1.3 * sqrt(lambda / (2 - lambda) * (1 - (1 - lambda)^(2 * seq_len(n))))
  beyond <- which(abs(mean - target) > reach)
  # Of the long list every hundredth value is enough.
  at <- if (n > 100) seq(100, n, 100) else seq_len(n)
  # Ten decimals are plenty to compare to eight digits, and keep the file small.
  kept <- function(v) I(round(v[at], 10))
  list(x = I(x), target = target, k = k, h = h, head = head > 0, at = I(at), high = kept(high), low = kept(low),
       first = if (length(out)) out[1] - 1, lambda = lambda, mean = kept(mean), upper = kept(target + reach),
       lower = kept(target - reach), firstBeyond = if (length(beyond)) beyond[1] - 1)
})
write_cases("monitoring", charts)
