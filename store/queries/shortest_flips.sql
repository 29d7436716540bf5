-- Admissible rows whose answer differs from the baseline's, fewest changes first; among equals
-- the p-value nearest to the baseline's comes first.
, flipped AS (
    SELECT c.*, abs(c.p_value - b.baseline_p_value) AS distance
    FROM changed AS c, base AS b
    WHERE c.admissible AND c.changes > 0 AND c.survives <> b.baseline_survives
    ORDER BY c.changes, distance, c.spec_high, c.spec_low
    LIMIT $limit
),
labels AS (
    SELECT axis, code, label, is_baseline FROM sweep_choice
    WHERE sweep = $sweep AND finding = $finding
),
steps AS (
    SELECT
        f.spec_high, f.spec_low,
        string_agg(h.axis || ': ' || h.label || ' → ' || n.label, '; ' ORDER BY
            list_position(['lags', 'deterministics', 'window', 'transformation', 'test',
                           'conditioning', 'measures'], h.axis)) AS changed
    FROM flipped AS f
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
    GROUP BY f.spec_high, f.spec_low
)
SELECT
    f.changes,
    printf('%016x%016x', f.spec_high, f.spec_low) AS specification,
    s.changed,
    f.p_value,
    f.reverse_p_value,
    p.window_start,
    p.window_end
FROM flipped AS f
JOIN steps AS s ON s.spec_high = f.spec_high AND s.spec_low = f.spec_low
LEFT JOIN window_position AS p
    ON p.sweep = f.sweep AND p.finding = f.finding AND p."window" = f."window"
    AND p.position = f.position
ORDER BY f.changes, f.distance, f.spec_high, f.spec_low;
