# Reference values for the ladder, from R. Run by hand in this folder: Rscript make-ladder-reference.R
# Needs the packages sandwich and jsonlite. The tests read the JSON file written here; R itself is not
# needed to run them. Everything is drawn from one seed, so a second run writes the same file.
# The design matrix is written out in full, one column an antenna and a receiver; lm() drops what is
# aliased. What data fix is asked of the null space by svd; what hangs on one cluster by taking each
# cluster away in turn; direct and indirect evidence by a fit with one more column.
suppressPackageStartupMessages({
  library(sandwich)
  library(jsonlite)
})
set.seed(20261201, kind = "Mersenne-Twister", normal.kind = "Inversion", sample.kind = "Rejection")

null_space <- function(x) {
  x <- unique(x)
  s <- svd(x, nu = 0, nv = ncol(x))
  d <- c(s$d, rep(0, ncol(x) - length(s$d)))
  s$v[, d < 1e-8 * max(s$d, 1), drop = FALSE]
}
fixed <- function(space, contrast) ncol(space) == 0 || max(abs(crossprod(space, contrast))) < 1e-6

fit <- function(x, y, w, cluster) {
  m <- lm(y ~ 0 + x, weights = w)
  ok <- !is.na(coef(m))
  n <- length(y)
  bears <- length(unique(cluster)) > 1 && n > m$rank && sum(w * residuals(m)^2) > 1e-18 * sum(w) * max(abs(y))^2
  v <- if (bears) vcovCL(m, cluster = cluster, type = "HC1", cadjust = TRUE)
  spaces <- lapply(unique(cluster), function(g) {
    rest <- x[cluster != g, , drop = FALSE]
    if (nrow(rest) == 0) diag(ncol(x)) else null_space(rest)
  })
  list(m = m, x = x, ok = ok, v = v, naive = if (bears) vcov(m), space = null_space(x), spaces = spaces,
       df = length(unique(cluster)) - 1)
}
contrast <- function(f, c, level) {
  if (!fixed(f$space, c)) return(NULL)
  solid <- all(vapply(f$spaces, fixed, TRUE, c))
  estimate <- sum(c[f$ok] * coef(f$m)[f$ok])
  variance <- if (is.null(f$v)) 0 else drop(c[f$ok] %*% f$v %*% c[f$ok])
  plain <- if (is.null(f$naive)) 1 else drop(c[f$ok] %*% f$naive[f$ok, f$ok] %*% c[f$ok])
  if (!solid || !(variance > 1e-12 * plain)) return(list(estimate, NA, NA, NA, NA))
  se <- sqrt(variance)
  t <- estimate / se
  reach <- qt((1 + level) / 2, f$df) * se
  list(estimate, se, 2 * pt(-abs(t), f$df), estimate - reach, estimate + reach)
}

# Groups of columns that one scale holds, and the part (more than half) of a group that no single cluster carries.
groups_of <- function(columns, same) {
  groups <- list()
  for (j in columns) {
    at <- Position(function(g) same(g[1], j), groups)
    if (is.na(at)) groups <- c(groups, list(j)) else groups[[at]] <- c(groups[[at]], j)
  }
  groups
}
unit <- function(k, plus, minus) {
  c <- numeric(k)
  c[plus] <- c[plus] + 1
  c[minus] <- c[minus] - 1
  c
}
scale_of <- function(f, group, level, reference) {
  k <- ncol(f$x)
  solid <- function(i, j) all(vapply(f$spaces, fixed, TRUE, unit(k, i, j)))
  parts <- groups_of(group, solid)
  core <- parts[[which.max(lengths(parts))]]
  if (2 * length(core) <= length(group)) core <- NULL
  against <- if (length(core) > 1) core else group
  if (reference %in% group) against <- reference
  lapply(group, function(j) {
    c <- numeric(k)
    c[j] <- 1
    c[against] <- c[against] - 1 / length(against)
    r <- if (length(group) == 1) NULL else if (j == reference) list(0, NA, NA, NA, NA) else contrast(f, c, level)
    list(column = j, value = r)
  })
}
chances <- function(f, group, draws) {
  k <- ncol(f$x)
  solid <- function(i, j) all(vapply(f$spaces, fixed, TRUE, unit(k, i, j)))
  parts <- groups_of(group, solid)
  core <- parts[[which.max(lengths(parts))]]
  if (2 * length(core) <= length(group)) core <- NULL
  if (length(core) < 2 || is.null(f$v)) return(list())
  c <- sapply(core[-1], function(j) unit(k, j, core[1]))[f$ok, , drop = FALSE]
  v <- crossprod(c, f$v %*% c)
  e <- eigen(v, symmetric = TRUE)
  root <- e$vectors %*% diag(sqrt(pmax(e$values, 0)), length(e$values))
  z <- matrix(rnorm(draws * ncol(c)), draws) %*% t(root)
  z <- cbind(0, sweep(z, 2, drop(crossprod(c, coef(f$m)[f$ok])), "+"))
  list(columns = I(core), chance = I(tabulate(max.col(z), length(core)) / draws))
}

kinds <- c("plain", "whole", "weights", "apart", "tangled", "tiny", "newcomer", "common", "bridge", "chain", "single")
cases <- list()
for (i in 1:242) {
  kind <- kinds[(i - 1) %% length(kinds) + 1]
  p <- switch(kind, tiny = sample(2:3, 1), bridge = 5, single = sample(2:4, 1), sample(3:7, 1))
  q <- switch(kind, tiny = sample(1:2, 1), single = 1, sample(2:4, 1))
  n <- switch(kind, tiny = sample(1:7, 1), sample(c(25, 40, 60, 90), 1))
  pairs <- t(combn(p, 2))
  if (kind == "apart") pairs <- pairs[(pairs[, 1] <= p %/% 2) == (pairs[, 2] <= p %/% 2), , drop = FALSE]
  if (kind == "chain") pairs <- pairs[pairs[, 2] - pairs[, 1] == 1, , drop = FALSE]
  if (kind == "bridge") pairs <- rbind(c(1, 2), c(1, 3), c(2, 3), c(3, 4), c(4, 5))
  if (kind == "plain" && nrow(pairs) > 3) pairs <- pairs[sort(sample(nrow(pairs), max(p, nrow(pairs) - 3))), , drop = FALSE]
  chosen <- pairs[sample(nrow(pairs), n, TRUE), , drop = FALSE]
  flip <- runif(n) < 0.5
  a <- ifelse(flip, chosen[, 2], chosen[, 1])
  b <- ifelse(flip, chosen[, 1], chosen[, 2])
  ra <- sample(q, n, TRUE)
  rb <- if (q == 1) ra else ifelse(runif(n) < 0.3, ra, (ra + sample(q - 1, n, TRUE) - 1) %% q + 1)
  if (kind == "tangled") {
    # The last antenna on the last receiver only, and nothing else on it.
    ra <- ifelse(a == p, q, (ra - 1) %% (q - 1) + 1)
    rb <- ifelse(b == p, q, (rb - 1) %% (q - 1) + 1)
  }
  if (kind == "common" && q > 1) {
    on <- sample(n, 8)
    b[on] <- a[on]
    rb[on] <- ra[on] %% q + 1
  }
  cluster <- sample(max(2, n %/% sample(2:4, 1)), n, TRUE)
  if (kind == "newcomer") {
    a <- pmin(a, p - 1)
    b <- ifelse(b == a | b == p, a %% (p - 1) + 1, b)
    new <- sample(n, 3)
    a[new] <- p
    b[new] <- c(1, 2, 1)
    cluster[new] <- cluster[new[1]]
  }
  keep <- !(a == b & ra == rb)
  a <- a[keep]; b <- b[keep]; ra <- ra[keep]; rb <- rb[keep]; cluster <- cluster[keep]
  n <- length(a)
  ids <- sort(sample(90, p))
  receiver_ids <- sort(sample(90, q))
  theta <- rnorm(p, 0, 3)
  rho <- rnorm(q, 0, 2)
  y <- theta[a] - theta[b] + rho[ra] - rho[rb] + rnorm(max(cluster), 0, 1.5)[cluster] + rnorm(n, 0, 4)
  y <- if (kind == "whole") round(y / 2) else round(y, 2)
  # Four decades: beyond that vcovCL itself loses digits (checked against exact rational arithmetic).
  w <- if (kind == "weights") signif(10^runif(n, -2, 2), 4) else rep(1, n)
  level <- c(0.95, 0.9, 0.99)[i %% 3 + 1]

  used <- sort(unique(c(a, b)))
  met <- sort(unique(c(ra[ra != rb], rb[ra != rb])))
  x <- matrix(0, n, length(used) + length(met))
  for (r in seq_len(n)) {
    x[r, ] <- unit(ncol(x), match(a[r], used), match(b[r], used))
    if (ra[r] != rb[r]) x[r, ] <- x[r, ] + unit(ncol(x), length(used) + match(ra[r], met), length(used) + match(rb[r], met))
  }
  k <- ncol(x)
  f <- fit(x, y, w, cluster)
  same <- function(i, j) fixed(f$space, unit(k, i, j))
  groups <- groups_of(seq_along(used), same)
  reference <- if (i %% 4 == 0) sample(seq_along(used), 1) else 0
  antennas <- unlist(lapply(groups, function(g) scale_of(f, g, level, reference)), recursive = FALSE)
  receivers <- if (length(met)) unlist(lapply(groups_of(length(used) + seq_along(met), same),
                                              function(g) scale_of(f, g, level, 0)), recursive = FALSE)
  hat <- hatvalues(f$m)
  named <- function(list, ids, offset) lapply(list, function(e) list(id = ids[e$column - offset], value = e$value))
  pair_list <- list()
  for (g in groups) if (length(g) > 1) for (pair in combn(sort(g), 2, simplify = FALSE)) {
    own <- (a == used[pair[1]] & b == used[pair[2]]) - (a == used[pair[2]] & b == used[pair[1]])
    difference <- unit(k, pair[1], pair[2])
    split <- list()
    if (any(own != 0)) {
      f2 <- fit(cbind(x, own), y, w, cluster)
      delta <- c(numeric(k), 1)
      split <- list(inconsistency = contrast(f2, delta, level), indirect = contrast(f2, c(difference, 0), level),
                    direct = contrast(f2, c(difference, 1), level))
    }
    pair_list <- c(pair_list, list(c(list(
      a = ids[used[pair[1]]], b = ids[used[pair[2]]], whole = contrast(f, difference, level),
      rows = sum(own != 0), clusters = length(unique(cluster[own != 0])),
      weightShare = sum(hat[own != 0]) / f$m$rank), split)))
  }
  cases[[i]] <- list(
    kind = kind, level = level, reference = if (reference) ids[used[reference]] else NA,
    antennaA = I(ids[a]), antennaB = I(ids[b]), receiverA = I(receiver_ids[ra]), receiverB = I(receiver_ids[rb]),
    difference = I(y), cluster = I(cluster - 1), weights = if (kind == "weights") w,
    rank = f$m$rank, df = f$df,
    residualVariance = if (n > f$m$rank) sum(w * residuals(f$m)^2) / (n - f$m$rank) else NA,
    groups = lapply(groups, function(g) I(ids[used[g]])),
    antennas = named(antennas, ids[used], 0), receivers = named(receivers, receiver_ids[met], length(used)),
    chances = lapply(groups, function(g) {
      best <- chances(f, g, 20000)
      if (length(best)) list(ids = I(ids[used[best$columns]]), chance = best$chance) else NULL
    }),
    pairs = pair_list)
}
cat(table(vapply(cases, `[[`, "", "kind")), "\n")
writeLines(toJSON(cases, auto_unbox = TRUE, digits = NA, na = "null", null = "null"), "ladder.json")
cat("ladder", length(cases), "cases\n")
