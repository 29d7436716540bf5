-- Direction verdicts of the admissible planned rows, over all and by choice.
WITH grouped AS (
    SELECT
        lags, deterministics, "window", transformation, test, conditioning, measures,
        verdict, count(*) AS rows
    FROM judged
    WHERE sweep = $sweep AND finding = $finding AND request = 0 AND admissible
    GROUP BY ALL
),
summed AS (
    SELECT
        CASE WHEN grouping(lags) = 0 THEN 'lags'
             WHEN grouping(deterministics) = 0 THEN 'deterministics'
             WHEN grouping("window") = 0 THEN 'window'
             WHEN grouping(transformation) = 0 THEN 'transformation'
             WHEN grouping(test) = 0 THEN 'test'
             WHEN grouping(conditioning) = 0 THEN 'conditioning'
             WHEN grouping(measures) = 0 THEN 'measures'
             ELSE 'all' END AS axis,
        coalesce(lags, deterministics, "window", transformation, test, conditioning, measures, 0)
            AS code,
        verdict, sum(rows)::BIGINT AS rows
    FROM grouped
    GROUP BY GROUPING SETS (
        (verdict), (verdict, lags), (verdict, deterministics), (verdict, "window"),
        (verdict, transformation), (verdict, test), (verdict, conditioning), (verdict, measures)
    )
)
SELECT
    s.axis,
    CASE WHEN s.axis = 'all' THEN 'all' ELSE c.label END AS choice,
    s.verdict,
    s.rows,
    s.rows / sum(s.rows) OVER (PARTITION BY s.axis, s.code) AS share,
    coalesce(c.position, 0) AS choice_position
FROM summed AS s
LEFT JOIN sweep_choice AS c
    ON c.sweep = $sweep AND c.finding = $finding AND c.axis = s.axis AND c.code = s.code
ORDER BY
    list_position(['all', 'lags', 'deterministics', 'window', 'transformation', 'test',
                   'conditioning', 'measures'], s.axis),
    choice_position, s.code,
    list_position(['one way', 'both ways', 'reverse', 'neither rejected', 'undetermined'],
                  s.verdict);
