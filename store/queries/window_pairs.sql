-- Rows of moving window entries of one sweep set side by side: the same choices on every other
-- axis and the same last date.
WITH entries AS (
    SELECT code, label, position FROM sweep_choice
    WHERE sweep = $sweep AND finding = $finding AND axis = 'window' AND entry_kind <> ''
),
dated AS (
    SELECT
        j.lags, j.deterministics, j.transformation, j.test, j.conditioning, j.measures,
        j."window", p.window_end, j.survives
    FROM judged AS j
    JOIN window_position AS p
        ON p.sweep = j.sweep AND p.finding = j.finding AND p."window" = j."window"
        AND p.position = j.position
    WHERE j.sweep = $sweep AND j.finding = $finding AND j.admissible
        AND j."window" IN (SELECT code FROM entries)
)
SELECT
    e.label AS first_window, f.label AS second_window,
    count(*) AS shared,
    count(*) FILTER (a.survives AND b.survives) AS both_survive,
    count(*) FILTER (a.survives AND NOT b.survives) AS only_first,
    count(*) FILTER (b.survives AND NOT a.survives) AS only_second,
    count(*) FILTER (NOT a.survives AND NOT b.survives) AS neither,
    min(a.window_end) AS first_end, max(a.window_end) AS last_end
FROM dated AS a
JOIN dated AS b
    ON b.lags = a.lags AND b.deterministics = a.deterministics
    AND b.transformation = a.transformation AND b.test = a.test
    AND b.conditioning = a.conditioning AND b.measures = a.measures
    AND b.window_end = a.window_end
JOIN entries AS e ON e.code = a."window"
JOIN entries AS f ON f.code = b."window" AND f.position > e.position
GROUP BY e.label, f.label, e.position, f.position
ORDER BY e.position, f.position;
