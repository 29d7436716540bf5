-- Every row of one finding in plan order within the part that is asked for: one window entry, and
-- where that holds very many rows one transformation and one choice of deterministic terms of it.
SELECT
    o.specification, o.origin, o.request,
    o.lags_choice, o.lags, o.deterministics,
    o.window_name, o.window_entry, o.position, o.window_start, o.window_end,
    o.transformation, o.test, o.conditioning, o.measures,
    o.observations, o.statistic, o.df_num, o.df_den, o.p_value,
    o.coefficient_sum, o.coefficient_sum_se, o.signed_partial_r2, o.standardised_sum,
    o.reverse_statistic, o.reverse_p_value, o.reverse_coefficient_sum,
    o.status, o.reverse_status, o.reason, o.counted_as, o.failed_screens,
    o.survives, o.other_sign, o.verdict, o.weight, o.is_baseline, o.computation, o.solver
FROM outcomes AS o
JOIN sweep_choice AS x ON x.sweep = $sweep AND x.finding = $finding
    AND x.axis = 'transformation' AND x.label = o.transformation
JOIN sweep_choice AS d ON d.sweep = $sweep AND d.finding = $finding
    AND d.axis = 'deterministics' AND d.label = o.deterministics
JOIN sweep_choice AS c ON c.sweep = $sweep AND c.finding = $finding
    AND c.axis = 'conditioning' AND c.label = o.conditioning
JOIN sweep_choice AS m ON m.sweep = $sweep AND m.finding = $finding
    AND m.axis = 'measures' AND m.label = o.measures
JOIN sweep_choice AS l ON l.sweep = $sweep AND l.finding = $finding
    AND l.axis = 'lags' AND l.label = o.lags_choice
JOIN sweep_choice AS t ON t.sweep = $sweep AND t.finding = $finding
    AND t.axis = 'test' AND t.label = o.test
WHERE o.sweep = $sweep AND o.finding_number = $finding
    AND o.window_name = $window
    AND ($transformation IS NULL OR o.transformation = $transformation)
    AND ($deterministics IS NULL OR o.deterministics = $deterministics)
ORDER BY
    x.position, d.position, c.position, m.position, l.position, t.position, o.position;
