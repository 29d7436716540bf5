-- Follows changes.sql.  "near": rows one or two changes away, with what each change of a pair
-- does alone at the same window position.  A pair that turns does so jointly where both changes
-- alone are admissible and neither turns; contained where one of them turns alone already;
-- unsettled where neither turns but one of them could not be judged.
-- "sets": one row for each set of changed choices, over the positions of its moving window;
-- p-values are those of admissible positions.
, one_or_two AS (
    SELECT
        *,
        CASE WHEN lags_differ THEN 'lags' WHEN deterministics_differ THEN 'deterministics'
             WHEN window_differs THEN 'window' WHEN transformation_differs THEN 'transformation'
             WHEN test_differs THEN 'test' WHEN conditioning_differs THEN 'conditioning'
             ELSE 'measures' END AS first_axis,
        CASE WHEN lags_differ THEN lags WHEN deterministics_differ THEN deterministics
             WHEN window_differs THEN "window" WHEN transformation_differs THEN transformation
             WHEN test_differs THEN test WHEN conditioning_differs THEN conditioning
             ELSE measures END AS first_code,
        CASE WHEN changes < 2 THEN NULL
             WHEN measures_differ THEN 'measures' WHEN conditioning_differs THEN 'conditioning'
             WHEN test_differs THEN 'test' WHEN transformation_differs THEN 'transformation'
             WHEN window_differs THEN 'window' ELSE 'deterministics' END AS second_axis,
        CASE WHEN changes < 2 THEN NULL
             WHEN measures_differ THEN measures WHEN conditioning_differs THEN conditioning
             WHEN test_differs THEN test WHEN transformation_differs THEN transformation
             WHEN window_differs THEN "window" ELSE deterministics END AS second_code
    FROM changed
    WHERE changes BETWEEN 1 AND 2
),
alone AS (
    SELECT
        first_axis AS axis, first_code AS code, CASE WHEN window_differs THEN position END AS place,
        admissible, turns, p_value, reverse_p_value, counted_status
    FROM one_or_two
    WHERE changes = 1
),
near AS (
    SELECT
        r.*,
        coalesce(a.admissible AND (r.changes = 1 OR b.admissible), FALSE) AS settled,
        coalesce(a.turns OR b.turns, FALSE) AS holds_a_flip,
        a.admissible AS first_admissible, b.admissible AS second_admissible,
        CASE WHEN a.counted_status = 0 THEN a.p_value END AS first_p,
        CASE WHEN b.counted_status = 0 THEN b.p_value END AS second_p
    FROM one_or_two AS r
    LEFT JOIN alone AS a
        ON r.changes = 2 AND a.axis = r.first_axis AND a.code = r.first_code
        AND a.place IS NOT DISTINCT FROM CASE WHEN r.first_axis = 'window' THEN r.position END
    LEFT JOIN alone AS b
        ON b.axis = r.second_axis AND b.code = r.second_code
        AND b.place IS NOT DISTINCT FROM CASE WHEN r.second_axis = 'window' THEN r.position END
),
sets AS (
    SELECT
        n.changes, n.first_axis, n.first_code, n.second_axis, n.second_code,
        count(*) AS positions,
        count(*) FILTER (n.counted_status = 0) AS rows_ok,
        count(*) FILTER (n.admissible) AS admissible,
        count(*) FILTER (n.admissible AND n.survives) AS survived,
        count(*) FILTER (n.turns) AS flips,
        count(*) FILTER (n.turns AND n.changes = 2 AND n.settled AND NOT n.holds_a_flip) AS joint,
        count(*) FILTER (n.turns AND n.changes = 2 AND n.holds_a_flip) AS contained,
        count(*) FILTER (
            n.turns AND n.changes = 2 AND NOT n.settled AND NOT n.holds_a_flip) AS unsettled,
        count(*) FILTER (n.turns_forward) AS flips_forward,
        count(*) FILTER (n.turns_reverse) AS flips_reverse,
        count(*) FILTER (n.turns_sign) AS flips_sign,
        median(n.p_value) FILTER (n.admissible) AS p_value,
        min(n.p_value) FILTER (n.admissible) AS p_low,
        max(n.p_value) FILTER (n.admissible) AS p_high,
        quantile_disc(n.p_value, 0.5) FILTER (n.admissible) AS p_middle_low,
        -quantile_disc(-n.p_value, 0.5) FILTER (n.admissible) AS p_middle_high,
        median(n.reverse_p_value) FILTER (n.admissible) AS reverse_p_value,
        quantile_disc(n.reverse_p_value, 0.5) FILTER (n.admissible) AS reverse_middle_low,
        -quantile_disc(-n.reverse_p_value, 0.5) FILTER (n.admissible)
            AS reverse_middle_high,
        coalesce(median(n.first_p) FILTER (n.first_admissible), median(n.first_p))
            AS first_p_value,
        coalesce(median(n.second_p) FILTER (n.second_admissible), median(n.second_p))
            AS second_p_value,
        min(w.window_start) FILTER (n.turns) AS window_start,
        max(w.window_end) FILTER (n.turns) AS window_end,
        any_value(n.spec_high) AS spec_high,
        any_value(n.spec_low) AS spec_low
    FROM near AS n
    LEFT JOIN window_position AS w
        ON w.sweep = n.sweep AND w.finding = n.finding AND w."window" = n."window"
        AND w.position = n.position
    GROUP BY ALL
)
