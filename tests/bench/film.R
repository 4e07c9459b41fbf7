# The yardstick of film.ts: everything that our fit of a working curve answers, by R's own functions.
# Rscript film.R data.csv count rounds -> one line "seconds <median seconds for all sets>", then one line of numbers per set.
arguments <- commandArgs(trailingOnly = TRUE)
films <- read.csv(arguments[1])
rounds <- as.integer(arguments[2])
sets <- split(films, films$set)
targets <- c(50, 100)

fieller <- function(a, b, vaa, vbb, vab, t) {
  A <- b^2 - t^2 * vbb
  B <- a * b - t^2 * vab
  C <- a^2 - t^2 * vaa
  discriminant <- B^2 - A * C
  if (discriminant < 0 || A <= 0) return(c(NA, NA))
  sort((B + c(-1, 1) * sqrt(discriminant)) / A)
}

fitAll <- function(set) {
  x <- log(set$exposure)
  fit <- lm(depth ~ x, data = data.frame(depth = set$depth, x = x))
  s <- summary(fit)
  dp <- confint(fit)[2, ]
  cf <- coef(fit)
  v <- vcov(fit)
  t <- qt(0.975, fit$df.residual)
  ec <- exp(fieller(-cf[1], cf[2], v[1, 1], v[2, 2], -v[1, 2], t))
  answers <- sapply(targets, function(z) c(
    exp((z - cf[1]) / cf[2]),
    exp(fieller(z - cf[1], cf[2], v[1, 1], v[2, 2], -v[1, 2], t)),
    exp(fieller(z - cf[1], cf[2], v[1, 1] + s$sigma^2, v[2, 2], -v[1, 2], t))
  ))
  full <- lm(set$depth ~ factor(set$exposure))
  lack <- anova(fit, full)
  bent <- lm(set$depth ~ x + I(x^2))
  bend <- anova(fit, bent)
  influence <- c(max(hatvalues(fit)), max(cooks.distance(fit)), max(abs(rstudent(fit))))
  c(cf[2], dp, exp(-cf[1] / cf[2]), ec, s$sigma, s$r.squared, answers, lack$F[2], lack$`Pr(>F)`[2], bend$F[2], influence)
}

invisible(lapply(sets, fitAll))
seconds <- replicate(rounds, {
  start <- Sys.time()
  for (set in sets) fitAll(set)
  as.numeric(difftime(Sys.time(), start, units = "secs"))
})
cat("seconds", format(median(seconds), digits = 10), "\n")
for (set in sets) cat(format(fitAll(set), digits = 15), "\n")
