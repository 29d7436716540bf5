-- Planned rows that were not counted, with their reasons.
WITH names AS (
    SELECT m.mask, string_agg(s.name, ', ' ORDER BY s.bit) AS names
    FROM (
        SELECT DISTINCT counted_mask & required_mask AS mask
        FROM judged WHERE sweep = $sweep AND finding = $finding
    ) AS m
    JOIN screen AS s ON (m.mask & (1 << s.bit)) <> 0
    GROUP BY m.mask
),
lost AS (
    SELECT
        counted_status, screened_out, lacks_sign, reason,
        CASE WHEN screened_out THEN counted_mask & required_mask ELSE 0 END AS mask,
        count(*) AS rows
    FROM judged
    WHERE sweep = $sweep AND finding = $finding AND request = 0 AND NOT admissible
    GROUP BY ALL
),
named AS (
    SELECT
        CASE WHEN l.screened_out THEN 'screened out'
             WHEN l.counted_status = 1 THEN 'not applicable'
             WHEN l.counted_status = 2 THEN 'infeasible'
             ELSE 'failed' END AS status,
        CASE WHEN l.screened_out THEN coalesce(n.names, '')
             WHEN l.lacks_sign THEN 'the claim has a sign and this test gives none'
             ELSE coalesce(r.text, '') END AS reason,
        sum(l.rows)::BIGINT AS rows,
        NOT l.screened_out AND NOT l.lacks_sign AND coalesce(r.ruled, FALSE) AS ruled
    FROM lost AS l
    LEFT JOIN names AS n ON n.mask = l.mask
    LEFT JOIN reason AS r ON r.code = l.reason
    GROUP BY ALL
),
absent AS (
    SELECT f.planned - count(j.finding) AS rows
    FROM finding AS f
    LEFT JOIN judged AS j ON j.sweep = f.sweep AND j.finding = f.finding AND j.request = 0
    WHERE f.sweep = $sweep AND f.finding = $finding
    GROUP BY f.planned
)
SELECT status, reason, rows, ruled
FROM (
    FROM named
    UNION ALL
    SELECT 'not run yet', 'the run has not come to them', rows, FALSE FROM absent WHERE rows > 0
)
ORDER BY
    list_position(
        ['not applicable', 'infeasible', 'failed', 'screened out', 'not run yet'], status),
    rows DESC, reason;
