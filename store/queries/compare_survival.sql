-- Survival by choice in two sweeps side by side, choices matched by meaning; all planned rows of
-- each sweep count, shared or not.
SELECT
    coalesce(m.axis, t.axis) AS axis,
    coalesce(m.choice, t.choice) AS choice,
    m.admissible AS my_admissible, m.survived AS my_survived, m.headline_share AS my_share,
    m.median_p_value AS my_median_p,
    t.admissible AS their_admissible, t.survived AS their_survived,
    t.headline_share AS their_share, t.median_p_value AS their_median_p,
    t.headline_share - m.headline_share AS difference
FROM (SELECT s.*, coalesce(c.token_high, 0) AS token_high, coalesce(c.token_low, 0) AS token_low
      FROM my_survival AS s LEFT JOIN my_token AS c ON c.axis = s.axis AND c.code = s.code
      WHERE s.finding = $mine) AS m
FULL OUTER JOIN
     (SELECT s.*, coalesce(c.token_high, 0) AS token_high, coalesce(c.token_low, 0) AS token_low
      FROM their_survival AS s LEFT JOIN their_token AS c ON c.axis = s.axis AND c.code = s.code
      WHERE s.finding = $theirs) AS t
    ON t.axis = m.axis AND t.token_high = m.token_high AND t.token_low = m.token_low
ORDER BY
    list_position(['all', 'lags', 'deterministics', 'window', 'transformation', 'test',
                   'conditioning', 'measures'], coalesce(m.axis, t.axis)),
    coalesce(m.choice_position, 10000 + t.choice_position), choice;
