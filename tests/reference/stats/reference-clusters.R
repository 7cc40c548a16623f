# Clustered means, one way and two ways, and two-way regressions beside those of make-reference.R, which
# runs this file and defines fit_case and offsets.
set.seed(20260119, kind = "Mersenne-Twister", normal.kind = "Inversion", sample.kind = "Rejection")

clustered_case <- function(i, n, clusters, two_way, build) {
  level <- c(0.95, 0.9, 0.99)[i %% 3 + 1]
  repeat {
    cluster <- sample.int(clusters, n, TRUE) - 1L
    second <- if (two_way) sample.int(max(2, clusters %/% 2), n, TRUE) - 1L
    if (length(unique(cluster)) > 1 && (!two_way || length(unique(second)) > 1)) break
  }
  weights <- if (i %% 6 == 0) round(runif(n, 0.1, 3), 2)
  design <- build(n)
  noise <- switch(i %% 4 + 1, rnorm(n, 0, 2), round(rnorm(n, 0, 3)), 2 * rexp(n), rcauchy(n))
  y <- as.numeric(design$x %*% rnorm(ncol(design$x))) + rnorm(clusters)[cluster + 1] + noise
  y <- round(y, if (i %% 4 == 1) 0 else 3)
  if (i %% 10 == 5) y <- y + 50000
  if (length(unique(y)) < 2) return(NULL)
  expected <- fit_case(design$x, y, cluster, second, weights, level)
  # Residuals that cancel within every cluster leave no error to compare; drawn anew.
  if (any(expected$se < 1e-6 * expected$naive, na.rm = TRUE)) return(NULL)
  c(list(kind = design$kind, level = level, y = y, cluster = cluster, second = second, weights = weights,
    cells = design$cells, cellCount = design$cell_count, columns = design$columns), expected)
}
intercept <- function(n) list(kind = "mean", x = matrix(1, n, 1), cells = NULL, cell_count = 0, columns = list(rep(1, n)))
two_cells <- function(n) {
  cells <- rep_len(c(0L, 1L, 1L), n)
  z <- offsets(n, 2)
  list(kind = "cells", x = cbind(outer(cells, 0:1, "==") * 1, z), cells = cells, cell_count = 2, columns = list(z[, 1]))
}

means <- list()
while (length(means) < 240) {
  i <- length(means) + 1
  n <- if (i %in% c(100, 200)) 2000 else c(3, 5, 12, 25, 40, 70)[i %% 6 + 1]
  means[[i]] <- clustered_case(i, n, max(2, n %/% c(1, 2, 5)[i %% 3 + 1]), i %% 2 == 0, intercept)
}
means <- lapply(means, function(case) { case$columns <- NULL; case })
write_cases("cluster-mean", means)

two_way <- list()
while (length(two_way) < 110) {
  i <- length(two_way) + 1
  n <- c(18, 30, 45)[i %% 3 + 1]
  two_way[[i]] <- clustered_case(i, n, n %/% c(2, 3)[i %% 2 + 1], TRUE, two_cells)
}
write_cases("cluster-two-way", two_way)
