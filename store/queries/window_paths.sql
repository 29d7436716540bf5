-- Moving windows along time: for each entry and position how many rows survive, the median p, and
-- the one row that has the baseline's choices on all other axes.
WITH home AS (
    SELECT axis, code FROM sweep_choice
    WHERE sweep = $sweep AND finding = $finding AND is_baseline
),
entries AS (
    SELECT code, label, entry_kind, length, position AS place FROM sweep_choice
    WHERE sweep = $sweep AND finding = $finding AND axis = 'window' AND entry_kind <> ''
),
rows AS (
    SELECT
        j."window", j.position, j.admissible, j.survives, j.p_value,
        j.lags = (SELECT code FROM home WHERE axis = 'lags')
            AND j.deterministics = (SELECT code FROM home WHERE axis = 'deterministics')
            AND j.transformation = (SELECT code FROM home WHERE axis = 'transformation')
            AND j.test = (SELECT code FROM home WHERE axis = 'test')
            AND j.conditioning = (SELECT code FROM home WHERE axis = 'conditioning')
            AND j.measures = (SELECT code FROM home WHERE axis = 'measures') AS of_baseline
    FROM judged AS j
    WHERE j.sweep = $sweep AND j.finding = $finding
        AND j."window" IN (SELECT code FROM entries)
        AND (j.request = 0 OR j."window" IN (
            SELECT code FROM sweep_choice
            WHERE sweep = $sweep AND finding = $finding AND axis = 'window' AND request > 0))
)
SELECT
    e.label AS window_name, e.entry_kind, e.length, e.place,
    p.position, p.window_start, p.window_end,
    count(*) AS rows,
    count(*) FILTER (r.admissible) AS admissible,
    count(*) FILTER (r.admissible AND r.survives) AS survived,
    median(r.p_value) FILTER (r.admissible) AS median_p,
    any_value(r.p_value) FILTER (r.of_baseline AND r.admissible) AS baseline_p,
    bool_or(r.survives) FILTER (r.of_baseline AND r.admissible) AS baseline_survives
FROM rows AS r
JOIN entries AS e ON e.code = r."window"
JOIN window_position AS p
    ON p.sweep = $sweep AND p.finding = $finding AND p."window" = r."window"
    AND p.position = r.position
GROUP BY ALL
ORDER BY e.place, p.window_end, p.position;
