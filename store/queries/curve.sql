-- Admissible planned rows in order of their estimate, thinned to $points ranks evenly spread from
-- the lowest to the highest; the baseline is always kept.  Once over all scales by the standardised
-- sum of the lag coefficients, which compares across them, and once within each scale
-- (transformation, measures and form of the test) by the sum itself.  The standard error of the
-- standardised sum is that of the sum, brought to the same scale.  Signs are turned where a measure
-- is inverted, so that they speak of the role.
WITH labels AS (
    SELECT axis, code, label, is_baseline, position, scale_group FROM sweep_choice
    WHERE sweep = $sweep AND finding = $finding
),
admissible AS (
    SELECT
        lags, deterministics, "window", transformation, test, conditioning, measures, position,
        spec_high, spec_low, p_value, survives,
        coefficient_sum * orientation AS effect,
        coefficient_sum_se AS error,
        standardised_sum * orientation AS size,
        CASE WHEN coefficient_sum <> 0
             THEN coefficient_sum_se * abs(standardised_sum / coefficient_sum) END AS size_error
    FROM judged
    WHERE sweep = $sweep AND finding = $finding AND request = 0 AND admissible
),
-- Where the baseline is a moving window, its last position stands for it.
home AS (
    SELECT spec_high, spec_low
    FROM admissible AS j
    WHERE NOT EXISTS (
        SELECT 1 FROM labels AS b
        WHERE b.is_baseline AND b.code <> CASE b.axis
            WHEN 'lags' THEN j.lags WHEN 'deterministics' THEN j.deterministics
            WHEN 'window' THEN j."window" WHEN 'transformation' THEN j.transformation
            WHEN 'test' THEN j.test WHEN 'conditioning' THEN j.conditioning
            ELSE j.measures END
    )
    ORDER BY position DESC
    LIMIT 1
),
scaled AS (
    SELECT
        concat_ws(' · ', x.label, m.label, nullif(t.scale_group, '')) AS scale,
        j.* EXCLUDE (effect, size, size_error), j.effect AS estimate
    FROM admissible AS j
    JOIN labels AS x ON x.axis = 'transformation' AND x.code = j.transformation
    JOIN labels AS m ON m.axis = 'measures' AND m.code = j.measures
    JOIN labels AS t ON t.axis = 'test' AND t.code = j.test
    UNION ALL
    SELECT
        'all' AS scale,
        * EXCLUDE (effect, size, size_error) REPLACE (size_error AS error), size AS estimate
    FROM admissible
),
totals AS (
    SELECT
        scale,
        count(*) AS admissible,
        count(estimate) AS rows,
        count(*) FILTER (estimate IS NOT NULL AND survives) AS survived,
        count(*) FILTER (estimate > 0) AS positive,
        median(estimate) AS median
    FROM scaled
    GROUP BY scale
),
ranked AS (
    SELECT
        *,
        row_number() OVER (PARTITION BY scale ORDER BY estimate, spec_high, spec_low) AS rank
    FROM scaled
    WHERE estimate IS NOT NULL
),
kept AS (
    SELECT r.*, h.spec_high IS NOT NULL AS is_baseline
    FROM ranked AS r
    JOIN totals AS n ON n.scale = r.scale
    LEFT JOIN home AS h ON h.spec_high = r.spec_high AND h.spec_low = r.spec_low
    WHERE r.rank = 1 OR h.spec_high IS NOT NULL OR n.rows <= $points
        OR (r.rank - 1) * ($points - 1) // (n.rows - 1)
            > (r.rank - 2) * ($points - 1) // (n.rows - 1)
)
SELECT
    k.scale,
    k.rank::BIGINT AS rank, k.estimate, k.error AS standard_error, k.p_value, k.survives,
    k.is_baseline,
    l.label AS lags, d.label AS deterministics, w.label AS "window", x.label AS transformation,
    t.label AS test, c.label AS conditioning, m.label AS measures,
    printf('%016x%016x', k.spec_high, k.spec_low) AS specification,
    n.admissible, n.rows, n.survived, n.positive, n.median,
    x.is_baseline AND m.is_baseline AND t.scale_group = (
        SELECT scale_group FROM labels WHERE axis = 'test' AND is_baseline) AS baseline_scale
FROM kept AS k
JOIN totals AS n ON n.scale = k.scale
JOIN labels AS l ON l.axis = 'lags' AND l.code = k.lags
JOIN labels AS d ON d.axis = 'deterministics' AND d.code = k.deterministics
JOIN labels AS w ON w.axis = 'window' AND w.code = k."window"
JOIN labels AS x ON x.axis = 'transformation' AND x.code = k.transformation
JOIN labels AS t ON t.axis = 'test' AND t.code = k.test
JOIN labels AS c ON c.axis = 'conditioning' AND c.code = k.conditioning
JOIN labels AS m ON m.axis = 'measures' AND m.code = k.measures
ORDER BY k.scale <> 'all', k.scale, k.rank;
