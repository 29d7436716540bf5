-- One row for each finding and specification of each sweep, with names instead of codes.
-- status is that of cause to effect; counted_as says how the row counts under the claim, so
-- that not applicable + infeasible + failed + screened out + admissible is every row.
CREATE VIEW outcomes AS
WITH choices AS (
    SELECT sweep, finding, axis, code, label, is_baseline, entry_kind FROM sweep_choice
),
masks AS (
    SELECT failed_mask AS mask FROM outcome
    UNION
    SELECT failed_mask | reverse_failed_mask FROM outcome
),
mask_names AS (
    SELECT m.mask, string_agg(s.name, ', ' ORDER BY s.bit) AS names
    FROM masks AS m
    JOIN screen AS s ON (m.mask & (1 << s.bit)) <> 0
    GROUP BY m.mask
)
SELECT
    j.sweep,
    f.name AS finding,
    f.cause,
    f.effect,
    f.given,
    f.claim,
    printf('%016x%016x', j.spec_high, j.spec_low) AS specification,
    CASE WHEN j.request = 0 THEN 'planned' ELSE 'added' END AS origin,
    l.label AS lags_choice,
    d.label AS deterministics,
    w.label AS window_name,
    CASE WHEN w.entry_kind = '' THEN 'fixed' ELSE w.entry_kind END AS window_entry,
    p.window_start,
    p.window_end,
    x.label AS transformation,
    t.label AS test,
    c.label AS conditioning,
    m.label AS measures,
    j.order_used AS lags,
    j.observations,
    j.statistic,
    j.df_num,
    j.df_den,
    j.p_value,
    j.coefficient_sum,
    j.coefficient_sum_se,
    j.signed_partial_r2,
    j.standardised_sum,
    j.reverse_statistic,
    j.reverse_p_value,
    j.reverse_coefficient_sum,
    q.name AS request,
    nullif(j.computation, 0) AS computation,
    CASE j.solver WHEN 1 THEN 'cholesky' WHEN 2 THEN 'qr' WHEN 3 THEN 'library'
                  ELSE 'none' END AS solver,
    CASE j.reverse_status WHEN 0 THEN 'ok' WHEN 1 THEN 'not applicable' WHEN 2 THEN 'infeasible'
                          ELSE 'failed' END AS reverse_status,
    CASE j.status WHEN 0 THEN 'ok' WHEN 1 THEN 'not applicable' WHEN 2 THEN 'infeasible'
                  ELSE 'failed' END AS status,
    CASE WHEN j.lacks_sign THEN 'the claim has a sign and this test gives none'
         ELSE coalesce(r.text, '') END AS reason,
    CASE WHEN j.admissible THEN 'admissible' WHEN j.screened_out THEN 'screened out'
         WHEN j.counted_status = 1 THEN 'not applicable' WHEN j.counted_status = 2 THEN 'infeasible'
         ELSE 'failed' END AS counted_as,
    j.admissible,
    coalesce(k.names, '') AS failed_screens,
    j.survives,
    j.other_sign,
    j.verdict,
    j.weight,
    j.request = 0 AND l.is_baseline AND d.is_baseline AND w.is_baseline AND x.is_baseline
        AND t.is_baseline AND c.is_baseline AND m.is_baseline AS is_baseline,
    j.finding AS finding_number,
    j.position
FROM judged AS j
JOIN finding AS f ON f.sweep = j.sweep AND f.finding = j.finding
JOIN choices AS l
    ON l.sweep = j.sweep AND l.finding = j.finding AND l.axis = 'lags' AND l.code = j.lags
JOIN choices AS d
    ON d.sweep = j.sweep AND d.finding = j.finding AND d.axis = 'deterministics'
    AND d.code = j.deterministics
JOIN choices AS w
    ON w.sweep = j.sweep AND w.finding = j.finding AND w.axis = 'window' AND w.code = j."window"
JOIN choices AS x
    ON x.sweep = j.sweep AND x.finding = j.finding AND x.axis = 'transformation'
    AND x.code = j.transformation
JOIN choices AS t
    ON t.sweep = j.sweep AND t.finding = j.finding AND t.axis = 'test' AND t.code = j.test
JOIN choices AS c
    ON c.sweep = j.sweep AND c.finding = j.finding AND c.axis = 'conditioning'
    AND c.code = j.conditioning
JOIN choices AS m
    ON m.sweep = j.sweep AND m.finding = j.finding AND m.axis = 'measures' AND m.code = j.measures
LEFT JOIN window_position AS p
    ON p.sweep = j.sweep AND p.finding = j.finding AND p."window" = j."window"
    AND p.position = j.position
LEFT JOIN request AS q ON q.sweep = j.sweep AND q.request = j.request
LEFT JOIN reason AS r ON r.code = j.reason
LEFT JOIN mask_names AS k ON k.mask = j.counted_mask;
