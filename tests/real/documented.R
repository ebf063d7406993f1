# The examples of R's own help pages (stats, datasets), run again: what each prints, line by line, as JSON.
# Run: Rscript --vanilla documented.R. A result is `say`d with the unit of its data and what the help page tells of
# the groups; a model with its table of coefficients and the intervals that confint prints.
options(width = 500, digits = 7, useFancyQuotes = FALSE)
told <- list()

say <- function(id, page, result, unit, ...) {
  told[[length(told) + 1]] <<- list(id = id, page = page, unit = unit, lines = I(capture.output(print(result))), ...)
}

# Summaries of groups as format() shows them in four digits.
summaries <- function(values, by) {
  lapply(split(values, by, drop = TRUE), function(group) {
    list(n = length(group), mean = format(mean(group), digits = 4), sd = format(sd(group), digits = 4))
  })
}

events <- function(happened, of) Map(function(x, n) list(n = n, events = x), happened, of)

model <- function(id, page, fit, unit, limits) {
  say(id, page, summary(fit), unit, n = nobs(fit), limits = I(capture.output(print(limits(fit)))))
}

# t.test, wilcox.test, cor.test and their kin
drug <- summaries(sleep$extra, sleep$group)
say("sleep/welch", "t.test", t.test(extra ~ group, data = sleep), "patient", groups = drug)
say("sleep/student", "t.test", t.test(extra ~ group, data = sleep, var.equal = TRUE), "patient", groups = drug)
say("sleep/paired", "sleep", with(sleep, t.test(extra[group == 1], extra[group == 2], paired = TRUE)), "patient", n = 10)
say("sleep/one-sample", "sleep", with(sleep, t.test(extra[group == 2])), "patient", n = 10)
say("sleep/greater", "t.test", t.test(extra ~ group, data = sleep, alternative = "less"), "patient", groups = drug)
say("numbers/far", "t.test", t.test(1:10, y = c(7:20)), "unit")
say("numbers/outlier", "t.test", t.test(1:10, y = c(7:20, 200)), "unit")
tooth <- summaries(ToothGrowth$len, ToothGrowth$supp)
say("tooth/supplement", "ToothGrowth", t.test(len ~ supp, data = ToothGrowth), "animal", groups = tooth, split = c(1, 1))
for (dose in c(0.5, 1, 2)) {
  part <- ToothGrowth[ToothGrowth$dose == dose, ]
  say(paste0("tooth/dose-", dose), "ToothGrowth", t.test(len ~ supp, data = part), "animal",
      groups = summaries(part$len, part$supp), split = c(1, 1))
  say(paste0("tooth/student-", dose), "ToothGrowth", t.test(len ~ supp, data = part, var.equal = TRUE), "animal",
      groups = summaries(part$len, part$supp), split = c(1, 1))
}
say("cars/transmission", "mtcars", t.test(mpg ~ am, data = mtcars), "car", groups = summaries(mtcars$mpg, mtcars$am))
say("cars/horsepower", "mtcars", t.test(hp ~ am, data = mtcars), "car", groups = summaries(mtcars$hp, mtcars$am))
say("cars/engine", "mtcars", t.test(qsec ~ vs, data = mtcars, var.equal = TRUE), "car",
    groups = summaries(mtcars$qsec, mtcars$vs))
say("warp/wool", "warpbreaks", t.test(breaks ~ wool, data = warpbreaks), "loom", groups = summaries(warpbreaks$breaks, warpbreaks$wool), split = c(1, 1))
for (treatment in c("trt1", "trt2")) {
  part <- droplevels(PlantGrowth[PlantGrowth$group %in% c("ctrl", treatment), ])
  say(paste0("plants/", treatment), "PlantGrowth", t.test(weight ~ group, data = part), "plant",
      groups = summaries(part$weight, part$group), split = c(1, 1))
}
for (pair in list(c("casein", "linseed"), c("soybean", "sunflower"), c("horsebean", "meatmeal"))) {
  part <- droplevels(chickwts[chickwts$feed %in% pair, ])
  say(paste0("chicks/", pair[1]), "chickwts", t.test(weight ~ feed, data = part), "chick",
      groups = summaries(part$weight, part$feed))
}
for (measure in c("Sepal.Length", "Sepal.Width", "Petal.Length", "Petal.Width")) {
  part <- droplevels(iris[iris$Species != "setosa", ])
  say(paste0("iris/", measure), "iris", t.test(part[[measure]] ~ part$Species), "flower",
      groups = summaries(part[[measure]], part$Species))
}
say("speed/michelson", "morley", with(morley, t.test(Speed[Expt == 1], mu = 734.5)), "run", n = 20)
say("ozone/months", "wilcox.test", suppressWarnings(wilcox.test(Ozone ~ Month, data = airquality, subset = Month %in% c(5, 8))), "day", n = 52)
depression <- list(x = c(1.83, 0.50, 1.62, 2.48, 1.68, 1.88, 1.55, 3.06, 1.30),
                   y = c(0.878, 0.647, 0.598, 2.05, 1.06, 1.29, 1.06, 3.14, 1.29))
say("depression/signed", "wilcox.test", with(depression, wilcox.test(x, y, paired = TRUE, alternative = "greater")), "patient", n = 9)
say("permeability/rank", "wilcox.test",
    wilcox.test(c(0.80, 0.83, 1.89, 1.04, 1.45, 1.38, 1.91, 1.64, 0.73, 1.46), c(1.15, 0.88, 0.90, 0.74, 1.21),
                alternative = "greater"), "sample", n = 15)
meat <- list(x = c(44.4, 45.9, 41.9, 53.3, 44.7, 44.1, 50.7, 45.2, 60.1), y = c(2.6, 3.1, 2.5, 5.0, 3.6, 4.0, 5.2, 2.8, 3.8))
say("tuna/pearson", "cor.test", with(meat, cor.test(x, y)), "tin", n = 9)
say("tuna/kendall", "cor.test", with(meat, cor.test(x, y, method = "kendall", alternative = "greater")), "tin", n = 9)
say("judges/pearson", "cor.test", cor.test(~ CONT + INTG, data = USJudgeRatings), "judge", n = 43)
for (measure in c("disp", "hp", "drat", "wt", "qsec")) {
  say(paste0("cars/cor-", measure), "mtcars", cor.test(mtcars$mpg, mtcars[[measure]]), "car", n = 32)
}
for (measure in names(swiss)[-1]) {
  say(paste0("swiss/cor-", measure), "swiss", cor.test(swiss$Fertility, swiss[[measure]]), "province", n = 47)
}
say("trees/cor", "trees", cor.test(trees$Girth, trees$Volume), "tree", n = 31)
say("attitude/cor", "attitude", cor.test(attitude$rating, attitude$learning, conf.level = 0.9), "department", n = 30)

# Counts
say("smokers/k", "prop.test", prop.test(c(83, 90, 129, 70), c(86, 93, 136, 82)), "patient", groups = events(c(83, 90, 129, 70), c(86, 93, 136, 82)))
say("heads/one", "prop.test", prop.test(55, 100), "toss", groups = events(55, 100))
for (two in list(c(83, 86, 90, 93), c(129, 136, 70, 82), c(83, 86, 70, 82))) {
  id <- paste0("smokers/", two[1], "-", two[3])
  say(id, "prop.test", prop.test(two[c(1, 3)], two[c(2, 4)]), "patient", groups = events(two[c(1, 3)], two[c(2, 4)]))
  say(paste0(id, "-plain"), "prop.test", prop.test(two[c(1, 3)], two[c(2, 4)], correct = FALSE), "patient", groups = events(two[c(1, 3)], two[c(2, 4)]))
}
for (department in dimnames(UCBAdmissions)$Dept) {
  admitted <- UCBAdmissions["Admitted", , department]
  all <- colSums(UCBAdmissions[, , department])
  say(paste0("admissions/", department), "UCBAdmissions", prop.test(unname(admitted), unname(all)), "applicant", groups = events(unname(admitted), unname(all)))
  say(paste0("admissions/exact-", department), "UCBAdmissions", fisher.test(UCBAdmissions[, , department]), "applicant", n = sum(UCBAdmissions[, , department]))
}
say("mendel/dwarf", "binom.test", binom.test(682, 682 + 243, p = 3 / 4), "plant", groups = events(682, 925))
say("tea/exact", "fisher.test", fisher.test(matrix(c(3, 1, 1, 3), 2), alternative = "greater"), "cup", n = 8)
say("twins/exact", "fisher.test", fisher.test(matrix(c(2, 10, 15, 3), 2), alternative = "less"), "twin", n = 30)
say("jobs/exact", "fisher.test", fisher.test(matrix(c(1, 2, 1, 0, 3, 3, 6, 1, 10, 10, 14, 9, 6, 7, 12, 11), 4, 4)), "person", n = 96)
parties <- as.table(rbind(c(762, 327, 468), c(484, 239, 477)))
say("parties/chisq", "chisq.test", chisq.test(parties), "voter", n = sum(parties))
say("sprays/chisq", "chisq.test", chisq.test(InsectSprays$count > 7, InsectSprays$spray), "plot", n = 72)
say("frequencies/even", "chisq.test", chisq.test(c(89, 37, 30, 28, 2)), "unit", n = 186)
say("frequencies/given", "chisq.test", chisq.test(c(89, 37, 30, 28, 2), p = c(40, 20, 20, 15, 5), rescale.p = TRUE), "unit", n = 186)
hair <- margin.table(HairEyeColor, c(1, 2))
say("hair/eyes", "HairEyeColor", chisq.test(hair), "student", n = sum(hair))
say("hair/sex", "HairEyeColor", chisq.test(margin.table(HairEyeColor, c(1, 3))), "student", n = sum(hair))
say("titanic/sex", "Titanic", chisq.test(margin.table(Titanic, c(2, 4))), "passenger", n = sum(Titanic))
say("titanic/class", "Titanic", chisq.test(margin.table(Titanic, c(1, 4))), "passenger", n = sum(Titanic))
say("approval/mcnemar", "mcnemar.test", mcnemar.test(matrix(c(794, 86, 150, 570), 2)), "voter", n = 1600)
say("admissions/mantel", "mantelhaen.test", mantelhaen.test(UCBAdmissions), "applicant", n = sum(UCBAdmissions))
say("mine/poisson", "poisson.test", poisson.test(137, 24.19893), "event", n = 137)

# Analysis of variance and its kin
sprays <- summaries(InsectSprays$count, InsectSprays$spray)
feeds <- summaries(chickwts$weight, chickwts$feed)
plants <- summaries(PlantGrowth$weight, PlantGrowth$group)
say("sleep/oneway", "oneway.test", oneway.test(extra ~ group, data = sleep), "patient", groups = drug)
say("sleep/oneway-equal", "oneway.test", oneway.test(extra ~ group, data = sleep, var.equal = TRUE), "patient", groups = drug)
say("sprays/oneway", "oneway.test", oneway.test(count ~ spray, data = InsectSprays), "plot", groups = sprays)
say("plants/oneway", "PlantGrowth", oneway.test(weight ~ group, data = PlantGrowth, var.equal = TRUE), "plant", groups = plants, split = c(1, 1, 1))
say("chicks/oneway", "chickwts", oneway.test(weight ~ feed, data = chickwts, var.equal = TRUE), "chick", groups = feeds)
say("sprays/kruskal", "kruskal.test", kruskal.test(count ~ spray, data = InsectSprays), "plot", n = 72)
say("ozone/kruskal", "kruskal.test", kruskal.test(Ozone ~ Month, data = airquality), "day", n = 116)
say("sprays/bartlett", "bartlett.test", bartlett.test(count ~ spray, data = InsectSprays), "plot", groups = sprays)
say("sprays/fligner", "fligner.test", fligner.test(count ~ spray, data = InsectSprays), "plot", n = 72)
say("plants/bartlett", "bartlett.test", bartlett.test(weight ~ group, data = PlantGrowth), "plant", groups = plants)
say("wool/variances", "var.test", var.test(breaks ~ wool, data = warpbreaks), "loom", n = 54)
say("plants/anova", "PlantGrowth", anova(lm(weight ~ group, data = PlantGrowth)), "plant", n = 30, groups = plants)
say("chicks/anova", "chickwts", anova(lm(weight ~ feed, data = chickwts)), "chick", n = 71, groups = feeds)
say("sprays/anova", "InsectSprays", anova(lm(sqrt(count) ~ spray, data = InsectSprays)), "plot", n = 72)
say("warp/anova", "warpbreaks", anova(lm(breaks ~ wool * tension, data = warpbreaks)), "loom", n = 54)
say("tooth/anova", "ToothGrowth", anova(lm(len ~ supp * factor(dose), data = ToothGrowth)), "animal", n = 60)
say("npk/aov", "npk", summary(aov(yield ~ block + N * P * K, npk)), "plot", n = 24)
say("swiss/anova", "anova.lm", anova(lm(Fertility ~ ., data = swiss)), "province", n = 47)
say("warp/tukey", "TukeyHSD", TukeyHSD(aov(breaks ~ wool + tension, data = warpbreaks), "tension", ordered = TRUE), "loom", n = 54)
say("plants/tukey", "TukeyHSD", TukeyHSD(aov(weight ~ group, data = PlantGrowth)), "plant", n = 30)

# Models
wald <- function(fit) confint.default(fit)
plant <- droplevels(PlantGrowth[PlantGrowth$group != "trt2", ])
model("lm/plants", "lm", lm(weight ~ group, data = plant), "plant", confint)
model("lm/cars", "mtcars", lm(mpg ~ wt + hp, data = mtcars), "car", confint)
model("lm/all-cars", "confint", lm(100 / mpg ~ disp + hp + wt + am, data = mtcars), "car", confint)
model("lm/swiss", "swiss", lm(Fertility ~ ., data = swiss), "province", confint)
model("lm/stack", "stackloss", lm(stack.loss ~ ., data = stackloss), "day", confint)
model("lm/longley", "longley", lm(Employed ~ ., data = longley), "year", confint)
model("lm/stopping", "cars", lm(dist ~ speed, data = cars), "run", confint)
model("lm/savings", "LifeCycleSavings", lm(sr ~ pop15 + pop75 + dpi + ddpi, data = LifeCycleSavings), "country", confint)
model("lm/attitude", "attitude", lm(rating ~ ., data = attitude), "department", confint)
model("lm/warp", "warpbreaks", lm(breaks ~ wool * tension, data = warpbreaks), "loom", confint)
model("lm/trees", "trees", lm(log(Volume) ~ log(Girth) + log(Height), data = trees), "tree", confint)
model("glm/infert", "infert", glm(case ~ spontaneous + induced, data = infert, family = binomial()), "woman", wald)
model("glm/infert-all", "infert", glm(case ~ age + parity + education + spontaneous + induced, data = infert, family = binomial()), "woman", wald)
model("glm/cars", "mtcars", glm(am ~ wt, data = mtcars, family = binomial()), "car", wald)
model("glm/sprays", "InsectSprays", glm(count ~ spray, data = InsectSprays, family = poisson()), "plot", wald)
model("glm/warp", "warpbreaks", glm(breaks ~ wool + tension, data = warpbreaks, family = poisson()), "loom", wald)
model("glm/esoph", "esoph", glm(cbind(ncases, ncontrols) ~ agegp + unclass(tobgp) + unclass(alcgp), data = esoph, family = binomial()), "stratum", wald)
treatments <- data.frame(counts = c(18, 17, 15, 20, 10, 20, 25, 13, 12), outcome = gl(3, 1, 9), treatment = gl(3, 3))
model("glm/dobson", "glm", glm(counts ~ outcome + treatment, family = poisson(), data = treatments), "cell", wald)

cat(jsonlite::toJSON(told, auto_unbox = TRUE, digits = NA))
