"""R code read for hypothesis tests."""

from __future__ import annotations

from pathlib import Path

import pytest
from analysis.reading import file_of, told


def of(root: Path, code: str | bytes) -> list[str]:
    """The tests that this code calls."""
    return told(file_of(root, "a.R", code))


@pytest.mark.parametrize(
    ("code", "call"),
    [
        ("t.test(a, b)", "t.test 1 1"),
        ("stats::wilcox.test(a, b)", "wilcox.test 1 1"),
        ("library(rstatix); wilcox_test(d, y ~ g)", "wilcox_test 1 1+"),
        ("require('coin', quietly = TRUE); independence_test(y ~ g)", "independence_test 1 1"),
        ("coin::wilcox_test(y ~ g)", "wilcox_test 1 1"),
        ("pacman::p_load(survival, dplyr)\nsurvdiff(s ~ g)", "survdiff 2 1"),
        ("p <- (\n t.test(a,\n b))$p.value", "t.test 2 1"),
        ("print(`t.test`(a, b))", "t.test 1 1"),
        ("pairwise.t.test(y, g)", "pairwise.t.test 1 1+"),
        ("ks.test(a, b)", "ks.test 1 1"),
        ("with(d, t.test(a, b))", "t.test 1 1"),
        ("d |> t.test(y ~ g, data = _)", "t.test 1 1"),
        ("library(rstatix)\nd %>% group_by(g) %>% arrange(x) %>% kruskal_test(y ~ g)", "kruskal_test 2 1+"),
        ("t.test(a, b) -> result", "t.test 1 1"),
        ("r'--(t.test(x))--'; 'a\\'t.test(1)'; x <- t.test(a)", "t.test 1 1"),
        ('x$y[["t.test"]] <- t.test(a)', "t.test 1 1"),
        ("(1)[2] <- t.test(a)", "t.test 1 1"),
        ("sep <- ';'; p <- t.test(a)", "t.test 1 1"),
        ("5 %in% x; a$t.test(1); t.test(b)", "t.test 1 1"),
    ],
)
def test_calls_are_found(tmp_path: Path, code: str, call: str) -> None:
    assert of(tmp_path, code) == [call]


@pytest.mark.parametrize(
    "code",
    [
        "# t.test(a, b)",
        "x <- 't.test(a, b)'",
        'x <- "a \\" t.test(a, b)"',
        'x <- r"---(t.test(a, b))---"',
        "power.t.test(n = 20, delta = 1)",
        "my.t.test(a, b)",
        "t.test <- function(x) x\nt.test(a)",
        "wilcox_test(d, y ~ g)",
        "other::t.test(a, b)",
        "quote(t.test(a, b))",
        "p.adjust(p, 'holm')",
        "object$t.test(a, b)",
        "cor.test(a, b)$estimate",
        "chisq.test(a)$expected",
        "t.test",
        "5 + 3 # glm",
    ],
)
def test_what_only_looks_like_a_test_is_none(tmp_path: Path, code: str) -> None:
    assert of(tmp_path, code) == []


def test_checks_of_assumptions_are_counted_apart(tmp_path: Path) -> None:
    code = """
    shapiro.test(a)
    var.test(a, b)
    ks.test(a, "pnorm", 0, 1)
    ks.test(a, pnorm)
    ks.test(a, y = b)
    ks.test(a)
    sapply(d, shapiro.test)
    """
    file = file_of(tmp_path, "a.R", code)

    assert file.checks == 5
    assert told(file) == ["ks.test 6 1", "ks.test 7 1"]


def test_a_fit_counts_once_its_tests_are_looked_at(tmp_path: Path) -> None:
    code = """
    library(lme4); library(lmtest)
    silent <- lm(y ~ x)
    predict(silent)
    summary(resid(silent))
    summary(silent$residuals)
    fit <- lm(y ~ x, data = d)
    summary(fit)$coefficients
    y %>% glm(x ~ ., data = .) |> summary()
    anova(glm(y ~ x))
    mixed <- lme4::lmer(y ~ x + (1 | g))
    coeftest(mixed)
    anova(fit, silent)
    anova(fits[[1]])
    models <- list(lm(a ~ b), lm(b ~ c))
    lapply(models, summary)
    for (each in models) print(confint(each))
    """
    assert of(tmp_path, code) == [
        "lm 7 1", "glm 9 1", "glm 10 1", "lmer 11 1", "anova 13 1+", "anova 14 1+", "lm 15 1", "lm 15 1",
    ]  # fmt: skip


def test_loops_count_where_the_text_tells_their_length(tmp_path: Path) -> None:
    code = """
    outcomes <- c("worms", "ph", n = "clay")
    three <- 2:4
    for (each in outcomes) t.test(d[[each]])
    for (at in 1:5L)
      wilcox.test(d[[at]])
    for (at in seq_along(outcomes)) { kruskal.test(d[[at]]) }
    sapply(c(1, -2), function(at) cor.test(d[[at]], y)$p.value)
    lapply(list(a, b, x), \\(each) binom.test(each))
    for (at in three) prop.test(at, 3)
    """
    assert [each.split()[2] for each in of(tmp_path, code)] == ["3", "5", "3", "2", "3", "3"]


@pytest.mark.parametrize(
    "code",
    [
        "for (each in names(d)) t.test(each)",
        "for (each in c(a, b)) t.test(each)",
        "for (each in c()) t.test(each)",
        "for (each in list()) t.test(each)",
        "for (each in 1:n) t.test(each)",
        "for (each in 1:1e3) t.test(each)",
        "for (each in again) t.test(each)",
        "for (each in again[1]) t.test(each)",
        "while (x) t.test(each)",
        "repeat { t.test(each); break }",
        "for (each in 1:3) { if (each) next; t.test(each) }",
        "for (each in 1:3) if (each) t.test(each)",
        "lapply(split(d, d$g), function(one) t.test(one))",
        "sapply(d, t.test)",
        "purrr::map(d, stats::t.test)",
        "map(d, ~ t.test(.x))",
        "d |> group_by(g) |> summarise(p = t.test(y)$p.value)",
        "Map(function(one, other) { t.test(one, other) }, a, b)",
        "tapply()\nsapply(d, FUN = t.test)",
    ],
)
def test_a_loop_of_unknown_length_makes_at_least_one(tmp_path: Path, code: str) -> None:
    (call,) = of(tmp_path, f"again <- c(1, 2)\nagain <- again[1]\n{code}\n")
    assert call.split()[2] == "1+"


def test_tests_on_random_numbers_in_a_loop_are_a_simulation(tmp_path: Path) -> None:
    code = """
    replicate(1000, t.test(x)$p.value)
    for (at in 1:1000) t.test(rnorm(9))
    once <- function() wilcox.test(runif(9))
    sapply(1:1000, function(at) once())
    sapply(1:1000, function(at) t.test(rnorm(9)))
    t.test(rnorm(9))
    """
    assert of(tmp_path, code) == ["wilcox.test 4 0+", "t.test 7 1"]


def test_of_branches_the_first_one_counts(tmp_path: Path) -> None:
    code = """
    if (normal) {
      t.test(a, b)
    }
    else if (paired) wilcox.test(a, b) else
      kruskal.test(a, b)
    if (wanted)
      cor.test(a, b)
    result <- if (x) binom.test(a) else prop.test(a)
    """
    assert [each.split()[2] for each in of(tmp_path, code)] == ["1", "0+", "0+", "1", "1", "0+"]


def test_functions_count_as_often_as_they_are_called(tmp_path: Path) -> None:
    code = """
    compare <- function(a, b = 2) {
      t.test(a, b)
    }
    never = function(x) wilcox.test(x)
    compare(1, 2); compare(3, 4)
    mapped <- \\(x) kruskal.test(x)
    lapply(d, mapped)
    Reduce(function(a, b) cor.test(a, b), d)
    """
    assert of(tmp_path, code) == ["t.test 3 2", "wilcox.test 5 0+", "kruskal.test 7 1+", "cor.test 9 0+"]


def test_what_goes_to_declare_is_declared(tmp_path: Path) -> None:
    code = """
    source("gatecheck.R")
    declare(t.test(a, b), id = "nested")
    result <- wilcox.test(a)
    declare(result, id = paste0("soil/", name))
    kept <- list(); kept[["w"]] <- kruskal.test(a)
    declare(kept$w, id = name)
    report <- function(result, name) declare(result, name)
    report(cor.test(a, b), "x")
    made <- function() { return(binom.test(a)) }
    declare(made(), id = paste0(a, b))
    declare(id = "bare", test = list(p = fisher.test(x)$p.value))
    ({ poisson.test(a) })
    """
    file = file_of(tmp_path, "a.R", code)

    assert [(one.name, one.line) for one in file.tests if not one.declared] == [("poisson.test", 13)]
    assert [one.ids for one in file.tests][:3] == [(("nested",),), (("soil/", ""),), ()]
    assert len(file.tests) == 7


@pytest.mark.parametrize(
    ("code", "why", "line"),
    [
        ("t.test(a\nx <- 1", "has a bracket that is not closed", 1),
        ("x\nt.test(a]", "has a bracket that closes none", 2),
        ("t.test(a))", "has a bracket that closes none", 1),
        ("x\nt.test('a)", "has a text that does not end", 2),
        ("t.test(r'---(a)')", "has a text that does not end", 1),
        ("t.test" + "(" * 200 + ")" * 200, "is nested more than 100 deep", 1),
    ],
)
def test_code_that_cannot_be_read_is_told(tmp_path: Path, code: str, why: str, line: int) -> None:
    file = file_of(tmp_path, "a.R", code)

    assert file.tests == ()
    assert [(each.why, each.line, each.cell) for each in file.not_read] == [(f"the code {why}", line, None)]


def test_any_encoding_is_read(tmp_path: Path) -> None:
    assert of(tmp_path, "x <- 'ä'; größe <- t.test(ü)\n".encode("latin-1")) == ["t.test 1 1"]
    assert of(tmp_path, "\ufeffgröße <- t.test(ü)\r\nwilcox.test(a)\r\n".encode()) == [
        "t.test 1 1",
        "wilcox.test 2 1",
    ]
    assert of(tmp_path, b"x <- \xa7 \0 t.test(a)") == ["t.test 1 1"]


@pytest.mark.parametrize(
    "code",
    [
        "if",
        "for (t.test",
        "for () t.test(a)",
        "function",
        "lm <-",
        "<- t.test(a)",
        "if (a)",
        "else t.test(a)",
        "= lm",
        "\\ t.test(a)",
    ],
)
def test_code_that_is_no_whole_statement_breaks_nothing(tmp_path: Path, code: str) -> None:
    file = file_of(tmp_path, "a.R", f"{code}\n")

    assert {each.name for each in file.tests} <= {"t.test"}
