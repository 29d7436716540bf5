"""How every number is made, and what none of them says."""

from __future__ import annotations

from dataclasses import dataclass

__all__ = ["CAUTIONS", "METHOD_NOTES", "Note"]


@dataclass(frozen=True, slots=True)
class Note:
    """One heading with its paragraphs."""

    heading: str
    paragraphs: tuple[str, ...]


METHOD_NOTES = (
    Note(
        "Regression and hypothesis",
        (
            "For every specification the effect is regressed by least squares on its "
            "deterministic terms, its own lags, the lags of the given series and the lags of the "
            "cause. The hypothesis is that the q coefficients on the lags of the cause are zero "
            "(Granger 1969). The reverse regression, with the roles of cause and effect exchanged, "
            "is always estimated too.",
            "T is the number of rows of the regression, k its number of regressors; s0 and s1 are "
            "the restricted and unrestricted sums of squared residuals, on the same rows.",
        ),
    ),
    Note(
        "Statistics and reference laws",
        (
            "F = ((s0 − s1)/q) / (s1/(T − k)), on F(q, T − k). Wald = q·F, on χ²(q); with divisor "
            "T it is T(s0 − s1)/s1. LR = T ln(s0/s1), on χ²(q). LM = T(s0 − s1)/s0, on χ²(q).",
            "With covariance HC0 to HC3 the statistic is b′V⁻¹b/q on F(q, T − k), or b′V⁻¹b on "
            "χ²(q) for the Wald form. V = (X′X)⁻¹M(X′X)⁻¹ with M = Σ e²xx′ (HC0; White 1980), "
            "times T/(T − k) for HC1, with e²/(1 − h) for HC2 and e²/(1 − h)² for HC3 (MacKinnon "
            "& White 1985), h being the leverage of the row.",
            "With covariance HAC, V = (X′X)⁻¹S(X′X)⁻¹ with S = Γ₀ + Σ w_j(Γ_j + Γ_j′), Γ_j the "
            "sums of products of scores j periods apart and w_j = 1 − j/(L + 1) (Bartlett; Newey "
            "& West 1987) or the quadratic spectral weights (Andrews 1991), no prewhitening. "
            "Automatic bandwidths follow Newey & West (1994) or Andrews (1991), from the scores of "
            "the standardised regressors. Autocorrelation left in a regression with lags of the "
            "effect makes its coefficients inconsistent, whatever the covariance: HAC is no mend "
            "for too few lags.",
            "The lag augmented test (Toda & Yamamoto 1995; Dolado & Lütkepohl 1996) adds d lags of "
            "every modelled series to the regression in levels or logarithms and tests the first p "
            "of the cause, in the F or the Wald form; with d at least the largest order of "
            "integration its law is the usual one whether or not the series are integrated.",
            "Tail probabilities come from survival functions, never from one minus a distribution "
            "function.",
        ),
    ),
    Note(
        "Lag choices",
        (
            "A fixed order uses every row that it can (its own sample) unless the choice names a "
            "common sample. A criterion considers orders 1 to its own maximum on their common "
            "sample, for the vector autoregression of the specification's own series, window and "
            "deterministic terms, and gives one order for both directions: AIC = ln|Σ| + 2m/T, HQ "
            "= ln|Σ| + 2m ln ln T/T, BIC = ln|Σ| + m ln T/T, FPE = ((T + n)/(T − n))^K |Σ|, with "
            "Σ the residual covariance with divisor T, K series, n regressors an equation and m "
            "estimated coefficients in all. The sequential likelihood-ratio rule goes from the "
            "maximum down and keeps the first order whose last lag is rejected. The chosen order "
            "is then estimated on its own sample.",
        ),
    ),
    Note(
        "Windows and transformations",
        (
            "A local transformation (logarithm, difference, growth) may read values before the "
            "window; lags may not. Transformations that depend on the window (detrending, filters) "
            "are computed inside it. A row is left out when any raw value that it uses, through "
            "lags or transformation, lies inside an excluded episode, so that time never closes "
            "up. Window dates are the first and last observation before lags are taken.",
            "Windows are cut from the dates at which the series of the finding's baseline measures "
            "and all its given and exogenous series exist. The same windows serve every "
            "conditioning set and every measure, so that leaving a series out, or measuring one "
            "otherwise, is compared on the same dates and not on others; a regression that leaves "
            "out a short series could use more of them.",
            "The Hamilton cycle is the residual of the value two years on, regressed within the "
            "window on a constant and the values of one seasonal cycle (Hamilton 2018: 8 quarters "
            "and 4 values, 24 months and 12; annual data take 1 value, weekly ones 52, daily ones "
            "those of a week).",
            "The Hodrick–Prescott cycle is two-sided: it uses later values, which blurs what came "
            "first.",
        ),
    ),
    Note(
        "What survives means",
        (
            "With p_f and p_r the p-values of cause to effect and of the reverse, a the level and "
            "S the sum of the tested coefficients: a finding that claims 'leads' survives where "
            "p_f ≤ a and S has the claimed sign, if one is claimed; 'leads one way' where p_f ≤ a "
            "and p_r > a; 'leads both ways' where both are at most a; 'does not lead' where p_f > "
            "a.",
            "The share is Σ w·survived / Σ w·admissible over planned rows, with w = 1/(positions "
            "of the window entry) × 1/(size of the test group). F, Wald, LR and LM with the same "
            "covariance on the same rows are one quantity in four dresses and form one test group.",
        ),
    ),
    Note(
        "Choosing specifications",
        (
            "The page holds counts of planned rows by combination of choices, and adds up those of "
            "a selection under the same rules and weights. Distinct computations do not add up "
            "over combinations, so they are stated for the whole plan alone. Where the "
            "combinations of a sweep are more than a page can hold, counts of all combinations of "
            "fewer axes stand in for them: every number shown is exact, but only so many axes can "
            "be narrowed at a time. Over time, neighbouring positions of moving windows are pooled "
            "where there are more than 400.",
        ),
    ),
    Note(
        "Size of the effect",
        (
            "The sum of coefficients has the standard error √(1′V1), V being the covariance of the "
            "tested coefficients. The signed partial R² is (s0 − s1)/s0 with the sign of the sum. "
            "The standardised sum is the sum times the ratio of the standard deviations of cause "
            "and effect. Coefficients are compared within one transformation, measure and form of "
            "the test; only the last two are compared across them.",
        ),
    ),
    Note(
        "Computation",
        (
            "Sums of squares come from one Cholesky factor of standardised moments; rows whose "
            "condition marks them are computed again by QR on the observations themselves. Each "
            "row of the store says which of the two it came from.",
        ),
    ),
)

CAUTIONS = (
    "Predictive precedence is not structural cause: a series can lead another because both "
    "answer to something else, or because expectations move first.",
    "A survival share is not the probability that the finding is true. Specifications share "
    "data, and many of them are near copies of each other.",
    "Survival under no effect is not yet calibrated in this version, so the share has no "
    "reference distribution: how often a finding like this would survive if there were nothing "
    "to find is not known from this report. The same holds for the number of flips.",
    "Overlapping windows share most of their data; neighbouring positions are not separate "
    "evidence.",
    "Omitted common drivers and temporal aggregation can create precedence or hide it.",
    "Failing to reject is not evidence of no effect, least of all in short windows.",
    "Decisions that rest on this report (policy, investment, safety) need judgement and review "
    "by people who know the field.",
)
