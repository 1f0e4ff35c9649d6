# SPDX-License-Identifier: GPL-3.0-or-later
# Ordinary nonlinear least squares on the runs against R's nls, 200 random series.
# usage: Rscript fit_nls.R DRIVER
driver <- commandArgs(trailingOnly = TRUE)[1]
set.seed(20240607)
relations <- c("flory-fox", "ueberreiter-kanig", "odriscoll-sanayei", "ogawa")
# With analytic gradients: numeric ones keep nls from converging to its own criterion.
curve <- function(f) deriv(f, c("a", "k"), function(a, k, m) {})
curves <- list(curve(~ a - k / m), curve(~ a / (1 + k / m)), curve(~ a - k * m^(-2/3)),
               curve(~ a - k / (m * sqrt(1.4))))
scales <- c(1.5e5, 400, 1.2e4, 1.5e5)
digits <- function(x) formatC(x, digits = 17, format = "g")
cases <- list(); text <- character()
for (i in 1:200) {
  w <- (i - 1) %% 4 + 1
  k <- sample(4:10, 1); runs <- sample(1:4, 1)
  mn <- exp(runif(k, log(1500), log(4e5)))
  env <- list(a = runif(1, 250, 450), k = scales[w] * runif(1, 0.5, 1.5))
  m <- rep(mn, each = runs)
  y <- as.numeric(curves[[w]](env$a, env$k, m)) + rnorm(length(m), 0, runif(1, 0.2, 2))
  cases[[i]] <- list(w = w, m = m, y = y, start = env)
  text <- c(text, paste(relations[w], "residuals none", k))
  for (j in 1:k)
    text <- c(text, paste(c(digits(mn[j]), 0, digits(1.4 * mn[j]), 2, "nan", runs,
                            digits(y[(j - 1) * runs + 1:runs])), collapse = " "))
}
out <- system2(driver, stdout = TRUE, input = text)
stopifnot(length(out) == 200)
worst <- c(0, 0)
for (i in 1:200) {
  if (startsWith(out[i], "fail")) stop(relations[cases[[i]]$w], ": ", out[i])
  got <- as.numeric(strsplit(out[i], " ")[[1]])
  f <- curves[[cases[[i]]$w]]
  fit <- nls(y ~ f(a, k, m), data = cases[[i]][c("m", "y")], start = cases[[i]]$start,
             control = nls.control(tol = 1e-7, maxiter = 200, warnOnly = FALSE))
  want <- coef(summary(fit))
  d <- c(max(abs(got[2:3] / want[, 1] - 1)), max(abs(got[4:5] / want[, 2] - 1)),
         abs(got[7] / sigma(fit) - 1))
  worst <- pmax(worst, d[1:2])
  if (!(d[1] < 1e-6 && d[2] < 1e-4 && d[3] < 1e-6))
    stop(relations[cases[[i]]$w], " series ", i, ": ", out[i], " against ", paste(want, collapse = " "))
}
cat("200 series: parameters within", worst[1], ", standard errors within", worst[2], "\n")
