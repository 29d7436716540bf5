-- One row for each choice that differs from the baseline on its axis alone.
-- p_middle_low and p_middle_high are the two middle values, from which the reader takes the
-- median of z; p_value is their mean, the median.  So for the reverse.  All of these and the sum
-- are over the admissible positions; over all that could be run where none is admissible.  The
-- sum's sign is turned where a measure is inverted: it speaks of the role.
, singles AS (
    SELECT
        *,
        CASE WHEN lags_differ THEN 'lags' WHEN deterministics_differ THEN 'deterministics'
             WHEN window_differs THEN 'window' WHEN transformation_differs THEN 'transformation'
             WHEN test_differs THEN 'test' WHEN conditioning_differs THEN 'conditioning'
             ELSE 'measures' END AS axis,
        CASE WHEN lags_differ THEN lags WHEN deterministics_differ THEN deterministics
             WHEN window_differs THEN "window" WHEN transformation_differs THEN transformation
             WHEN test_differs THEN test WHEN conditioning_differs THEN conditioning
             ELSE measures END AS code,
        CASE WHEN admissible THEN 0 WHEN screened_out THEN 1 ELSE 1 + counted_status END AS loss
    FROM changed
    WHERE changes = 1
),
shown_singles AS (
    SELECT
        *,
        CASE WHEN bool_or(admissible) OVER (PARTITION BY axis, code) THEN admissible
             ELSE counted_status = 0 END AS shown
    FROM singles
),
summed AS (
    SELECT
        axis, code,
        count(*) AS rows,
        count(*) FILTER (counted_status = 0) AS rows_ok,
        count(*) FILTER (admissible) AS admissible,
        count(*) FILTER (admissible AND survives) AS survived,
        count(*) FILTER (turns) AS flips,
        count(*) FILTER (turns_forward) AS flips_forward,
        count(*) FILTER (turns_reverse) AS flips_reverse,
        count(*) FILTER (turns_sign) AS flips_sign,
        median(p_value) FILTER (shown) AS p_value,
        min(p_value) FILTER (shown) AS p_low,
        max(p_value) FILTER (shown) AS p_high,
        quantile_disc(p_value, 0.5) FILTER (shown) AS p_middle_low,
        -quantile_disc(-p_value, 0.5) FILTER (shown) AS p_middle_high,
        median(reverse_p_value) FILTER (shown) AS reverse_p_value,
        quantile_disc(reverse_p_value, 0.5) FILTER (shown) AS reverse_middle_low,
        -quantile_disc(-reverse_p_value, 0.5) FILTER (shown) AS reverse_middle_high,
        median(coefficient_sum * orientation) FILTER (shown) AS coefficient_sum,
        min(loss) AS loss,
        arg_min(reason, loss) AS reason,
        bool_or(lacks_sign) AS lacks_sign,
        any_value(spec_high) AS spec_high,
        any_value(spec_low) AS spec_low
    FROM shown_singles
    GROUP BY axis, code
)
SELECT
    s.axis,
    c.label AS choice,
    CASE WHEN c.entry_kind = '' THEN 'fixed' ELSE c.entry_kind END AS entry_kind,
    s.rows AS positions,
    s.rows_ok, s.admissible, s.survived, s.flips,
    s.flips_forward, s.flips_reverse, s.flips_sign,
    s.p_value, s.p_low, s.p_high, s.p_middle_low, s.p_middle_high,
    s.reverse_p_value, s.reverse_middle_low, s.reverse_middle_high,
    s.coefficient_sum,
    ['ok', 'screened out', 'not applicable', 'infeasible', 'failed'][s.loss + 1] AS status,
    CASE WHEN s.lacks_sign AND s.loss = 2 THEN 'the claim has a sign and this test gives none'
         ELSE coalesce(r.text, '') END AS reason,
    CASE WHEN s.rows = 1 THEN printf('%016x%016x', s.spec_high, s.spec_low) END AS specification,
    b.baseline_p_value, b.baseline_reverse_p_value, b.baseline_survives,
    list_position(['lags', 'deterministics', 'window', 'transformation', 'test', 'conditioning',
                   'measures'], s.axis) - 1 AS axis_position,
    c.position AS choice_position
FROM summed AS s
JOIN sweep_choice AS c
    ON c.sweep = $sweep AND c.finding = $finding AND c.axis = s.axis AND c.code = s.code
LEFT JOIN base AS b ON TRUE
LEFT JOIN reason AS r ON r.code = s.reason
ORDER BY axis_position, choice_position;
