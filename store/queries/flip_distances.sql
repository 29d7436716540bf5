-- Admissible rows and flips by the number of axes changed.
SELECT
    c.changes,
    count(*) AS rows,
    count(*) FILTER (c.survives <> b.baseline_survives) AS flips
FROM changed AS c
LEFT JOIN base AS b ON TRUE
WHERE c.admissible AND c.changes > 0
GROUP BY c.changes
ORDER BY c.changes;
