-- Planned rows of one finding with the number of axes on which they differ from the baseline,
-- and the axis itself where it is one.  The other queries on changes start from here: the text
-- is put in front of them as the common table "changed", with "base" the baseline's own row.
WITH home AS (
    SELECT
        max(code) FILTER (axis = 'lags') AS lags,
        max(code) FILTER (axis = 'deterministics') AS deterministics,
        max(code) FILTER (axis = 'window') AS "window",
        max(code) FILTER (axis = 'transformation') AS transformation,
        max(code) FILTER (axis = 'test') AS test,
        max(code) FILTER (axis = 'conditioning') AS conditioning,
        max(code) FILTER (axis = 'measures') AS measures
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
),
changed AS (
    SELECT
        *,
        lags_differ::INTEGER + deterministics_differ::INTEGER + window_differs::INTEGER
            + transformation_differs::INTEGER + test_differs::INTEGER
            + conditioning_differs::INTEGER + measures_differ::INTEGER AS changes
    FROM differing
),
-- Where the baseline is a moving window, its last position stands for it.
base AS (
    SELECT
        p_value AS baseline_p_value, survives AS baseline_survives,
        reverse_p_value AS baseline_reverse_p_value
    FROM changed
    WHERE changes = 0
    ORDER BY position DESC
    LIMIT 1
)
