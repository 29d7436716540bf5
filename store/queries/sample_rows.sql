-- The rows named in the registered frame drawn, with what must be known to compute them again.
SELECT
    f.name, o.*,
    printf('%016x%016x', o.spec_high, o.spec_low) AS specification,
    p.window_start, p.window_end,
    coalesce(r.text, '') AS reason_text, coalesce(r.ruled, FALSE) AS ruled
FROM outcome AS o
SEMI JOIN drawn USING (finding, spec_high, spec_low)
JOIN finding AS f ON f.sweep = o.sweep AND f.finding = o.finding
LEFT JOIN window_position AS p
    ON p.sweep = o.sweep AND p.finding = o.finding AND p."window" = o."window"
    AND p.position = o.position
LEFT JOIN reason AS r ON r.code = o.reason
WHERE o.sweep = $sweep
ORDER BY o.finding, specification;
