-- Window entries over their positions; $pooled neighbouring positions make one row.
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
        min(position) AS position, count(*) AS pooled
    FROM entries
    GROUP BY "window", pool
),
counted AS (
    SELECT
        e."window", e.pool,
        count(*) AS planned,
        count(*) FILTER (j.admissible) AS admissible,
        count(*) FILTER (j.admissible AND j.survives) AS survived,
        quantile_cont(j.p_value, [0.25, 0.5, 0.75]) FILTER (j.admissible) AS quartiles
    FROM judged AS j
    JOIN entries AS e ON e."window" = j."window" AND e.position = j.position
    WHERE j.sweep = $sweep AND j.finding = $finding AND j.request = 0
    GROUP BY e."window", e.pool
)
SELECT
    c.label AS window_name,
    CASE WHEN c.entry_kind = '' THEN 'fixed' ELSE c.entry_kind END AS entry_kind,
    nullif(c.length, 0) AS length,
    p.window_start, p.window_end, p.position,
    k.planned, k.admissible, k.survived,
    CASE WHEN k.admissible > 0 THEN k.survived / k.admissible END AS share,
    k.quartiles[2] AS median_p,
    k.quartiles[1] AS p_low,
    k.quartiles[3] AS p_high,
    p.pooled
FROM counted AS k
JOIN pools AS p ON p."window" = k."window" AND p.pool = k.pool
JOIN sweep_choice AS c
    ON c.sweep = $sweep AND c.finding = $finding AND c.axis = 'window' AND c.code = k."window"
ORDER BY c.position, p.position;
