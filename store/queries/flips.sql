-- Sets of one or two changed choices under which the finding turns in at least one position.
-- Single changes first; then pairs that turn although neither change alone does; then the rest.
-- Within each comes first what turns (in this way) in the larger part of its positions, then the
-- p-value that moved furthest, on the scale of log p.
, labels AS (
    SELECT axis, code, label, entry_kind, is_baseline, position FROM sweep_choice
    WHERE sweep = $sweep AND finding = $finding
)
SELECT
    s.changes,
    CASE WHEN s.changes = 1 THEN 'one change'
         WHEN s.joint > 0 THEN 'two changes, neither turns alone'
         WHEN s.contained > 0 THEN 'two changes, one turns alone'
         ELSE 'two changes, one cannot be judged alone' END AS kind,
    s.first_axis, hf.label AS first_from, f.label AS first_to,
    s.second_axis, hs.label AS second_from, t.label AS second_to,
    CASE WHEN coalesce(nullif(f.entry_kind, ''), t.entry_kind, '') = '' THEN 'fixed'
         ELSE coalesce(nullif(f.entry_kind, ''), t.entry_kind) END AS entry_kind,
    s.positions, s.rows_ok, s.admissible, s.survived, s.flips,
    s.joint, s.contained, s.unsettled,
    s.flips_forward, s.flips_reverse, s.flips_sign,
    s.p_value, s.p_low, s.p_high, s.p_middle_low, s.p_middle_high,
    s.reverse_p_value, s.reverse_middle_low, s.reverse_middle_high,
    s.first_p_value, s.second_p_value,
    s.window_start, s.window_end,
    CASE WHEN s.positions = 1 THEN printf('%016x%016x', s.spec_high, s.spec_low) END
        AS specification,
    b.baseline_p_value, b.baseline_reverse_p_value, b.baseline_survives
FROM sets AS s
JOIN labels AS f ON f.axis = s.first_axis AND f.code = s.first_code
JOIN labels AS hf ON hf.axis = s.first_axis AND hf.is_baseline
LEFT JOIN labels AS t ON t.axis = s.second_axis AND t.code = s.second_code
LEFT JOIN labels AS hs ON hs.axis = s.second_axis AND hs.is_baseline
CROSS JOIN base AS b
WHERE s.flips > 0
ORDER BY
    s.changes,
    list_position(['one change', 'two changes, neither turns alone', 'two changes, one turns alone',
                   'two changes, one cannot be judged alone'], kind),
    CASE WHEN s.joint > 0 THEN s.joint ELSE s.flips END / s.admissible DESC,
    abs(ln(greatest(s.p_value, 1e-300)) - ln(greatest(b.baseline_p_value, 1e-300))) DESC,
    list_position(['lags', 'deterministics', 'window', 'transformation', 'test', 'conditioning',
                   'measures'], s.first_axis), f.position,
    list_position(['lags', 'deterministics', 'window', 'transformation', 'test', 'conditioning',
                   'measures'], s.second_axis), t.position
LIMIT $limit;
