# Rank estimators on long lists with ties and zeros: coin::wilcoxsign_test exact up to a thousand differences,
# Walsh averages listed and sorted. Run by make-reference.R.
set.seed(20260120, kind = "Mersenne-Twister", normal.kind = "Inversion", sample.kind = "Rejection")

ranks <- lapply(1:20, function(i) {
  n <- c(90, 120, 200, 201, 300, 450, 700, 1000)[i %% 8 + 1]
  d <- switch(i %% 4 + 1, round(rnorm(n, 0.2, 3)), round(2 * rnorm(n, 0.1, 1)) / 2, round(3 * rexp(n)) - 2,
    sample(c(-1, 0, 0, 1, 2), n, TRUE))
  exact_p <- function(zero) sapply(c("two.sided", "greater", "less"), function(side)
    as.numeric(pvalue(wilcoxsign_test(d ~ rep(0, n), zero.method = zero, alternative = side, distribution = exact()))))
  walsh <- outer(d, d, "+") / 2
  walsh <- sort(walsh[!lower.tri(walsh)])
  k <- qsignrank(0.025, n)
  list(d = d, exact = unname(exact_p("Wilcoxon")), pratt = unname(exact_p("Pratt")), median = median(walsh),
       # The averages at R's own exact rank and ten places to either side of it.
       low = walsh[k + c(-10, 0, 10)], high = walsh[length(walsh) + 1 - k + c(-10, 0, 10)])
})
write_cases("ranks-tied", ranks)
