-- Rows whose answer differs between two sweeps, the largest move of p first (on the log scale).
, changed AS (
    SELECT
        *,
        abs(ln(greatest(my_p, 1e-300)) - ln(greatest(their_p, 1e-300))) AS distance
    FROM pairs
    WHERE my_admissible IS DISTINCT FROM their_admissible
        OR (my_admissible AND (my_survives <> their_survives OR my_verdict <> their_verdict))
    ORDER BY distance DESC NULLS FIRST, spec_high, spec_low
    LIMIT $limit
)
SELECT
    printf('%016x%016x', c.spec_high, c.spec_low) AS specification,
    l.label AS lags, d.label AS deterministics, w.label AS "window",
    p.window_start, p.window_end,
    x.label AS transformation, t.label AS test, g.label AS conditioning, m.label AS measures,
    c.my_p, c.their_p, c.my_reverse_p, c.their_reverse_p,
    c.my_order, c.their_order, c.my_observations, c.their_observations,
    c.my_sum, c.their_sum,
    CASE WHEN c.my_admissible THEN c.my_verdict ELSE 'not admissible' END AS my_verdict,
    CASE WHEN c.their_admissible THEN c.their_verdict ELSE 'not admissible' END AS their_verdict,
    CASE WHEN c.my_admissible THEN c.my_survives END AS my_survives,
    CASE WHEN c.their_admissible THEN c.their_survives END AS their_survives
FROM changed AS c
JOIN my_choice AS l ON l.finding = $mine AND l.axis = 'lags' AND l.code = c.lags
JOIN my_choice AS d
    ON d.finding = $mine AND d.axis = 'deterministics' AND d.code = c.deterministics
JOIN my_choice AS w ON w.finding = $mine AND w.axis = 'window' AND w.code = c."window"
JOIN my_choice AS x
    ON x.finding = $mine AND x.axis = 'transformation' AND x.code = c.transformation
JOIN my_choice AS t ON t.finding = $mine AND t.axis = 'test' AND t.code = c.test
JOIN my_choice AS g ON g.finding = $mine AND g.axis = 'conditioning' AND g.code = c.conditioning
JOIN my_choice AS m ON m.finding = $mine AND m.axis = 'measures' AND m.code = c.measures
LEFT JOIN my_position AS p
    ON p.finding = $mine AND p."window" = c."window" AND p.position = c.my_position
ORDER BY c.distance DESC NULLS FIRST, c.spec_high, c.spec_low;
