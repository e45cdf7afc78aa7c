# Competitor of the mixed-model bench: lme4 (D. Bates et al., J. Stat. Software 67(1), 2015) on random intercept and slope.
# Usage: Rscript mixed_lme4.R WORK, WORK one of
#   criteria  the restricted-likelihood criterion at every node, lme4's compiled evaluation alone, model built beforehand;
#   fit       one lmer() call, formula to fitted model, as a person types it.
# Problem, three lines on standard input: groups and rows a group; the readings, group by group (the regressor is the row's
# number in its group, from 0); the nodes as residual variance, intercept variance, slope variance, covariance, one after
# another. Then, a line each: "go N" does the work N times and prints nanoseconds and a number made from the result; "answer"
# prints all results.
suppressPackageStartupMessages(library(lme4))

work <- commandArgs(trailingOnly = TRUE)[1]
input <- file("stdin")
open(input)
numbers <- function() as.numeric(strsplit(readLines(input, n = 1), " ")[[1]])

counts <- numbers()
data <- data.frame(
  y = numbers(),
  x = rep(seq_len(counts[2]) - 1, counts[1]),
  g = factor(rep(seq_len(counts[1]), each = counts[2]))
)
nodes <- matrix(numbers(), nrow = 4)

parsed <- lFormula(y ~ x + (x | g), data = data, REML = TRUE)
deviance_of <- do.call(mkLmerDevfun, parsed)
inside <- environment(deviance_of)
free <- nrow(data) - 2

# lme4 profiles the residual variance; its parts give the criterion at any.
criterion <- function(node) {
  a <- sqrt(node[2] / node[1])
  b <- node[4] / node[1] / a
  deviance_of(c(a, b, sqrt(node[3] / node[1] - b^2)))
  squares <- inside$resp$wrss() + inside$pp$sqrL(1)
  inside$pp$ldL2() + inside$pp$ldRX2() + free * log(2 * pi * node[1]) + squares / node[1]
}

once <- if (work == "criteria") {
  function() apply(nodes, 2, criterion)
} else {
  function() {
    fit <- lmer(y ~ x + (x | g), data = data, REML = TRUE)
    c(REMLcrit(fit), fixef(fit), sigma(fit)^2, as.numeric(VarCorr(fit)$g)[c(1, 4, 2)])
  }
}

result <- NULL
repeat {
  line <- readLines(input, n = 1)
  if (length(line) == 0) break
  words <- strsplit(line, " ")[[1]]
  if (words[1] == "answer") {
    cat(paste(format(result, digits = 17, trim = TRUE), collapse = " "), "\n", sep = "")
  } else {
    started <- Sys.time()
    for (i in seq_len(as.integer(words[2]))) result <- once()
    taken <- as.numeric(difftime(Sys.time(), started, units = "secs"))
    cat(format(taken * 1e9, digits = 17), " ", format(sum(result), digits = 17), "\n", sep = "")
  }
  flush(stdout())
}
