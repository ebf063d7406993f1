# Two soporific drugs: R's built-in sleep data (Student 1908). Run from this folder: Rscript sleep.R
source("gatecheck.R")

# The two groups are compared as R's help page of t.test does, as if they were different patients.
declare(
  t.test(extra ~ group, data = sleep),
  id = "sleep/welch",
  claim = "The second drug is associated with more extra sleep than the first.",
  estimate = list(unit = "h"),
  sample = list(unit = "patient", n = 20L, groups = list(
    list(name = "drug 1", n = 10L, mean = mean(sleep$extra[sleep$group == 1]), sd = sd(sleep$extra[sleep$group == 1])),
    list(name = "drug 2", n = 10L, mean = mean(sleep$extra[sleep$group == 2]), sd = sd(sleep$extra[sleep$group == 2]))
  )),
  code = "sleep.R"
)

declare(
  lm(extra ~ group, data = sleep),
  coefficient = "group2",
  id = "sleep/linear-model",
  estimate = list(unit = "h"),
  sample = list(unit = "patient"),
  code = "sleep.R"
)
