# The work that bench/against_r.sh times: 10,000 row resamples of three straight
# lines on 60 rows (intercept, slope and R2 of each: 9 statistics) by boot with
# .lm.fit, and the BCa ends of all nine. Prints seconds, and the ends of one
# statistic so that both programs can be seen to do the same.
suppressMessages(library(boot))
d <- read.csv("testdata/reference_rows.csv"); d <- d[c(1:48, 1:12), ]
d$absl <- abs(d$latitude_deg); d$f <- 2 * 7.292115e-5 * sin(d$absl * pi / 180) * 1e4
y <- d$sinuosity; X <- list(cbind(1, d$valley_slope), cbind(1, d$absl), cbind(1, d$f))
one <- function(x, i) { m <- .lm.fit(x[i, , drop = FALSE], y[i]); c(m$coefficients, 1 - sum(m$residuals^2) / sum((y[i] - mean(y[i]))^2)) }
st <- function(d, i) c(one(X[[1]], i), one(X[[2]], i), one(X[[3]], i))
set.seed(1)
t1 <- system.time(b <- boot(d, st, R = 10000))[["elapsed"]]
t2 <- system.time(ci <- lapply(1:9, function(k) boot.ci(b, type = "bca", index = k)$bca[4:5]))[["elapsed"]]
cat(sprintf("%.4f %.4f %.6g %.6g\n", t1, t2, ci[[5]][1], ci[[5]][2]))
