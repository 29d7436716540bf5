-- Rows of one finding by window entry, transformation and deterministic terms, in plan order.
SELECT w.label AS "window", x.label AS transformation, d.label AS deterministics, p.rows
FROM (
    SELECT "window", transformation, deterministics, count(*) AS rows
    FROM outcome
    WHERE sweep = $sweep AND finding = $finding
    GROUP BY ALL
) AS p
JOIN sweep_choice AS w ON w.sweep = $sweep AND w.finding = $finding
    AND w.axis = 'window' AND w.code = p."window"
JOIN sweep_choice AS x ON x.sweep = $sweep AND x.finding = $finding
    AND x.axis = 'transformation' AND x.code = p.transformation
JOIN sweep_choice AS d ON d.sweep = $sweep AND d.finding = $finding
    AND d.axis = 'deterministics' AND d.code = p.deterministics
ORDER BY w.position, x.position, d.position;
