-- Sets of changed choices under which the finding turns, fewest changes first; the positions of a
-- moving window are one set.  Among equals comes first what turns in the larger part of its
-- positions, then the p-value nearest to the baseline's.  p-values are medians over admissible
-- positions.
, sets AS (
    SELECT
        c.changes,
        c.lags, c.deterministics, c."window", c.transformation, c.test, c.conditioning, c.measures,
        count(*) AS positions,
        count(*) FILTER (c.admissible) AS admissible,
        count(*) FILTER (c.turns) AS flips,
        median(c.p_value) FILTER (c.admissible) AS p_value,
        median(c.reverse_p_value) FILTER (c.admissible) AS reverse_p_value,
        min(c.position) FILTER (c.turns) AS first_position,
        max(c.position) FILTER (c.turns) AS last_position,
        min(c.spec_high) AS spec_high, min(c.spec_low) AS spec_low,
        any_value(c.baseline_p_value) AS baseline_p_value
    FROM changed AS c
    WHERE c.changes > 0
    GROUP BY ALL
),
nearest AS (
    SELECT
        *, row_number() OVER () AS number
    FROM (
        SELECT * FROM sets
        WHERE flips > 0
        ORDER BY
            changes, flips / admissible DESC, abs(p_value - baseline_p_value),
            lags, deterministics, "window", transformation, test, conditioning, measures
        LIMIT $limit
    )
),
labels AS (
    SELECT axis, code, label, is_baseline FROM sweep_choice
    WHERE sweep = $sweep AND finding = $finding
),
steps AS (
    SELECT
        f.number,
        string_agg(h.axis || ': ' || h.label || ' → ' || n.label, '; ' ORDER BY
            list_position(['lags', 'deterministics', 'window', 'transformation', 'test',
                           'conditioning', 'measures'], h.axis)) AS changed
    FROM nearest AS f
    JOIN labels AS h ON h.is_baseline
    JOIN labels AS n
        ON n.axis = h.axis AND n.code <> h.code
        AND n.code = CASE h.axis
            WHEN 'lags' THEN f.lags
            WHEN 'deterministics' THEN f.deterministics
            WHEN 'window' THEN f."window"
            WHEN 'transformation' THEN f.transformation
            WHEN 'test' THEN f.test
            WHEN 'conditioning' THEN f.conditioning
            ELSE f.measures END
    GROUP BY f.number
),
places AS (
    SELECT "window", position, window_start, window_end FROM window_position
    WHERE sweep = $sweep AND finding = $finding
)
SELECT
    f.changes,
    s.changed,
    f.positions, f.admissible, f.flips,
    f.p_value, f.reverse_p_value,
    a.window_start, z.window_end,
    CASE WHEN f.positions = 1 THEN printf('%016x%016x', f.spec_high, f.spec_low) END
        AS specification
FROM nearest AS f
JOIN steps AS s ON s.number = f.number
LEFT JOIN places AS a ON a."window" = f."window" AND a.position = f.first_position
LEFT JOIN places AS z ON z."window" = f."window" AND z.position = f.last_position
ORDER BY f.number;
