-- Copies of the matched rows; sweep, finding, position and request are this sweep's own.
INSERT INTO outcome
SELECT o.* REPLACE (
    $sweep AS sweep, m.finding AS finding, m.position AS position, m.request AS request
)
FROM outcome AS o
JOIN reuse_match AS m
    ON m.source_sweep = o.sweep AND m.source_finding = o.finding
    AND m.spec_low = o.spec_low AND m.spec_high = o.spec_high;
