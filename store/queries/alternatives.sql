-- The baseline and each choice that differs from it on one axis, with all that is stored of them.
-- Where the choice is a moving window, numbers are medians over its admissible positions (over all
-- that could be run where none is) and what has no median (statistic, degrees of freedom, standard
-- error) is left out.  Signs are turned where a measure is inverted: they speak of the role.
, near AS (
    SELECT
        *,
        CASE WHEN changes = 0 THEN 'baseline'
             WHEN lags_differ THEN 'lags' WHEN deterministics_differ THEN 'deterministics'
             WHEN window_differs THEN 'window' WHEN transformation_differs THEN 'transformation'
             WHEN test_differs THEN 'test' WHEN conditioning_differs THEN 'conditioning'
             ELSE 'measures' END AS axis,
        CASE WHEN admissible THEN 0 WHEN screened_out THEN 1 ELSE 1 + counted_status END AS loss
    FROM changed
    WHERE changes <= 1
),
shown_near AS (
    SELECT
        *,
        CASE WHEN bool_or(admissible) OVER (
                PARTITION BY axis, lags, deterministics, "window", transformation, test,
                    conditioning, measures) THEN admissible
             ELSE TRUE END AS shown
    FROM near
),
summed AS (
    SELECT
        axis, lags, deterministics, "window", transformation, test, conditioning, measures,
        count(*) AS positions,
        count(*) FILTER (admissible) AS admissible,
        count(*) FILTER (admissible AND survives) AS survived,
        count(*) FILTER (turns) AS flips,
        min(order_used) AS order_least, max(order_used) AS order_most,
        min(observations) AS observations_least, max(observations) AS observations_most,
        median(statistic) AS statistic, median(reverse_statistic) AS reverse_statistic,
        min(df_num) AS df_num, min(df_den) AS df_den,
        median(p_value) FILTER (shown) AS p_value,
        median(reverse_p_value) FILTER (shown) AS reverse_p_value,
        median(coefficient_sum * orientation) FILTER (shown) AS coefficient_sum,
        median(coefficient_sum_se) FILTER (shown) AS coefficient_sum_se,
        median(reverse_coefficient_sum * orientation) FILTER (shown) AS reverse_coefficient_sum,
        min(position) AS first_position, max(position) AS last_position,
        min(loss) AS loss, arg_min(reason, loss) AS reason, bool_or(lacks_sign) AS lacks_sign,
        min(spec_high) AS spec_high, min(spec_low) AS spec_low
    FROM shown_near
    GROUP BY ALL
),
labels AS (
    SELECT axis, code, label, position FROM sweep_choice
    WHERE sweep = $sweep AND finding = $finding
),
places AS (
    SELECT "window", position, window_start, window_end FROM window_position
    WHERE sweep = $sweep AND finding = $finding
)
SELECT
    s.axis,
    l.label AS lags_choice, d.label AS deterministics, w.label AS window_name,
    x.label AS transformation, t.label AS test, c.label AS conditioning, m.label AS measures,
    k.meaning AS test_meaning,
    s.positions, s.admissible, s.survived, s.flips,
    s.order_least, s.order_most, s.observations_least, s.observations_most,
    CASE WHEN s.positions = 1 THEN s.statistic END AS statistic,
    CASE WHEN s.positions = 1 THEN s.reverse_statistic END AS reverse_statistic,
    CASE WHEN s.positions = 1 THEN s.df_num END AS df_num,
    CASE WHEN s.positions = 1 THEN s.df_den END AS df_den,
    s.p_value, s.reverse_p_value,
    s.coefficient_sum,
    CASE WHEN s.positions = 1 THEN s.coefficient_sum_se END AS coefficient_sum_se,
    s.reverse_coefficient_sum,
    a.window_start, z.window_end,
    ['ok', 'screened out', 'not applicable', 'infeasible', 'failed'][s.loss + 1] AS status,
    CASE WHEN s.lacks_sign AND s.loss = 2 THEN 'the claim has a sign and this test gives none'
         ELSE coalesce(r.text, '') END AS reason,
    CASE WHEN s.positions = 1 THEN printf('%016x%016x', s.spec_high, s.spec_low) END
        AS specification
FROM summed AS s
JOIN labels AS l ON l.axis = 'lags' AND l.code = s.lags
JOIN labels AS d ON d.axis = 'deterministics' AND d.code = s.deterministics
JOIN labels AS w ON w.axis = 'window' AND w.code = s."window"
JOIN labels AS x ON x.axis = 'transformation' AND x.code = s.transformation
JOIN labels AS t ON t.axis = 'test' AND t.code = s.test
JOIN labels AS c ON c.axis = 'conditioning' AND c.code = s.conditioning
JOIN labels AS m ON m.axis = 'measures' AND m.code = s.measures
JOIN choice AS k ON k.axis = 'test' AND k.code = s.test
LEFT JOIN places AS a ON a."window" = s."window" AND a.position = s.first_position
LEFT JOIN places AS z ON z."window" = s."window" AND z.position = s.last_position
LEFT JOIN reason AS r ON r.code = s.reason
ORDER BY
    list_position(['baseline', 'lags', 'deterministics', 'window', 'transformation', 'test',
                   'conditioning', 'measures'], s.axis),
    l.position, d.position, w.position, x.position, t.position, c.position, m.position;
