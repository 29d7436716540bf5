-- Survival over the positions of the window entries, by combination of the other axes' choices,
-- for each set of those axes that the reader puts in; $pooled neighbouring positions make one
-- row.  $axes are the axes that occur in a set; an axis that is not in one is summed over, and
-- its position is then -1.
WITH entries AS (
    SELECT
        w."window", w.position, w.window_start, w.window_end,
        (w.position - min(w.position) OVER (PARTITION BY w."window")) // $pooled AS pool
    FROM window_position AS w
    WHERE w.sweep = $sweep AND w.finding = $finding
),
pools AS (
    SELECT
        "window", pool, min(window_start) AS window_start, max(window_end) AS window_end,
        count(*) AS pooled
    FROM entries
    GROUP BY "window", pool
),
planned_rows AS (
    SELECT
        j."window", e.pool,
        CASE WHEN list_contains($axes::VARCHAR[], 'lags') THEN j.lags END AS lags,
        CASE WHEN list_contains($axes::VARCHAR[], 'deterministics') THEN j.deterministics END
            AS deterministics,
        CASE WHEN list_contains($axes::VARCHAR[], 'transformation') THEN j.transformation END
            AS transformation,
        CASE WHEN list_contains($axes::VARCHAR[], 'test') THEN j.test END AS test,
        CASE WHEN list_contains($axes::VARCHAR[], 'conditioning') THEN j.conditioning END
            AS conditioning,
        CASE WHEN list_contains($axes::VARCHAR[], 'measures') THEN j.measures END AS measures,
        j.admissible,
        j.admissible AND j.survives AS survives,
        j.admissible AND j.sign_holds
            AND j.holds_from <= 0.01 AND 0.01 < j.holds_below AS survives_1,
        j.admissible AND j.sign_holds
            AND j.holds_from <= 0.05 AND 0.05 < j.holds_below AS survives_5,
        j.admissible AND j.sign_holds
            AND j.holds_from <= 0.10 AND 0.10 < j.holds_below AS survives_10
    FROM judged AS j
    JOIN entries AS e ON e."window" = j."window" AND e.position = j.position
    WHERE j.sweep = $sweep AND j.finding = $finding AND j.request = 0
),
cells AS (
    SELECT
        "window", pool, lags, deterministics, transformation, test, conditioning, measures,
        count(*) FILTER (admissible) AS admissible,
        count(*) FILTER (survives) AS survived,
        count(*) FILTER (survives_1) AS survived_1,
        count(*) FILTER (survives_5) AS survived_5,
        count(*) FILTER (survives_10) AS survived_10
    FROM planned_rows
    GROUP BY GROUPING SETS (/*sets*/)
),
places AS (
    SELECT axis, code, position, entry_kind FROM sweep_choice
    WHERE sweep = $sweep AND finding = $finding
)
SELECT
    w.position AS "window",
    CASE WHEN w.entry_kind = '' THEN 'fixed' ELSE w.entry_kind END AS entry_kind,
    k.pool, p.window_start, p.window_end, p.pooled,
    coalesce(l.position, -1) AS lags,
    coalesce(d.position, -1) AS deterministics,
    coalesce(x.position, -1) AS transformation,
    coalesce(t.position, -1) AS test,
    coalesce(c.position, -1) AS conditioning,
    coalesce(m.position, -1) AS measures,
    k.admissible, k.survived, k.survived_1, k.survived_5, k.survived_10
FROM cells AS k
JOIN pools AS p ON p."window" = k."window" AND p.pool = k.pool
JOIN places AS w ON w.axis = 'window' AND w.code = k."window"
LEFT JOIN places AS l ON l.axis = 'lags' AND l.code = k.lags
LEFT JOIN places AS d ON d.axis = 'deterministics' AND d.code = k.deterministics
LEFT JOIN places AS x ON x.axis = 'transformation' AND x.code = k.transformation
LEFT JOIN places AS t ON t.axis = 'test' AND t.code = k.test
LEFT JOIN places AS c ON c.axis = 'conditioning' AND c.code = k.conditioning
LEFT JOIN places AS m ON m.axis = 'measures' AND m.code = k.measures
ORDER BY ALL;
