-- Planned rows of one finding with the number of axes on which they differ from the baseline.
-- The other queries on changes start from here: the text is put in front of them as the common
-- tables "home" (the baseline's codes), "base" (its row) and "changed".
--
-- Where the baseline is a moving window, its last position stands for it, and so it does in
-- every row that changes other axes: another position alone is not a change of a choice.
WITH home AS (
    SELECT
        max(code) FILTER (axis = 'lags') AS lags,
        max(code) FILTER (axis = 'deterministics') AS deterministics,
        max(code) FILTER (axis = 'window') AS "window",
        max(code) FILTER (axis = 'transformation') AS transformation,
        max(code) FILTER (axis = 'test') AS test,
        max(code) FILTER (axis = 'conditioning') AS conditioning,
        max(code) FILTER (axis = 'measures') AS measures,
        (
            SELECT coalesce(max(w.position), 0)
            FROM window_position AS w
            JOIN sweep_choice AS c ON c.sweep = w.sweep AND c.finding = w.finding
                AND c.axis = 'window' AND c.code = w."window"
            WHERE w.sweep = $sweep AND w.finding = $finding AND c.is_baseline
        ) AS position,
        (
            SELECT claim IN ('leads one way', 'leads both ways')
            FROM finding WHERE sweep = $sweep AND finding = $finding
        ) AS two_way
    FROM sweep_choice
    WHERE sweep = $sweep AND finding = $finding AND is_baseline
),
differing AS (
    SELECT
        j.*,
        j.lags <> h.lags AS lags_differ,
        j.deterministics <> h.deterministics AS deterministics_differ,
        j."window" <> h."window" AS window_differs,
        j.transformation <> h.transformation AS transformation_differs,
        j.test <> h.test AS test_differs,
        j.conditioning <> h.conditioning AS conditioning_differs,
        j.measures <> h.measures AS measures_differ
    FROM judged AS j, home AS h
    WHERE j.sweep = $sweep AND j.finding = $finding AND j.request = 0
        AND (j."window" <> h."window" OR j.position = h.position)
),
counted_changes AS (
    SELECT
        *,
        lags_differ::INTEGER + deterministics_differ::INTEGER + window_differs::INTEGER
            + transformation_differs::INTEGER + test_differs::INTEGER
            + conditioning_differs::INTEGER + measures_differ::INTEGER AS changes
    FROM differing
),
base AS (
    SELECT
        p_value AS baseline_p_value, reverse_p_value AS baseline_reverse_p_value,
        CASE WHEN admissible THEN survives END AS baseline_survives,
        sign_holds AS baseline_sign_holds
    FROM counted_changes
    WHERE changes = 0
    LIMIT 1
),
-- turns: an admissible row that answers otherwise than an admissible baseline.  What made it
-- turn: a direction whose test answers otherwise (the reverse one only where the claim looks at
-- it), or the sign, where the tests alone would have let the claim hold.
changed AS (
    SELECT
        *,
        turns AND (p_value <= level) <> (baseline_p_value <= level) AS turns_forward,
        turns AND two_way
            AND (reverse_p_value <= level) <> (baseline_reverse_p_value <= level) AS turns_reverse,
        turns AND sign_holds <> baseline_sign_holds
            AND holds_from <= level AND level < holds_below AS turns_sign
    FROM (
        SELECT
            c.*, b.*, h.two_way,
            coalesce(
                c.changes > 0 AND c.admissible AND c.survives <> b.baseline_survives, FALSE
            ) AS turns
        FROM counted_changes AS c
        CROSS JOIN home AS h
        LEFT JOIN base AS b ON TRUE
    )
)
