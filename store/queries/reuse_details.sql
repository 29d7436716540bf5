-- Copies of the details of the matched rows that want them.
INSERT INTO details
SELECT d.* REPLACE ($sweep AS sweep, m.finding AS finding)
FROM details AS d
JOIN reuse_match AS m
    ON m.source_sweep = d.sweep AND m.source_finding = d.finding
    AND m.spec_low = d.spec_low AND m.spec_high = d.spec_high
WHERE m.details;
