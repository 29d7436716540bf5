-- One row for each sweep, with what is stored of it.
SELECT
    s.sweep, s.plan_digest, s.title, s.started, e.finished, s.significance,
    coalesce(o.rows, 0) AS rows, coalesce(f.findings, 0) AS findings,
    coalesce(f.planned, 0) AS planned
FROM sweep AS s
LEFT JOIN (
    SELECT sweep, max(happened) AS finished FROM event WHERE kind = 'finished' GROUP BY sweep
) AS e ON e.sweep = s.sweep
LEFT JOIN (SELECT sweep, count(*) AS rows FROM outcome GROUP BY sweep) AS o ON o.sweep = s.sweep
LEFT JOIN (SELECT sweep, count(*) AS findings, sum(planned + added)::BIGINT AS planned FROM finding GROUP BY sweep) AS f
    ON f.sweep = s.sweep
ORDER BY s.sweep;
