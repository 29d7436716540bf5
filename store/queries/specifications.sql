-- Findings and specifications whose id lies in a range.
SELECT finding, spec_high, spec_low
FROM outcome
WHERE sweep = $sweep
    AND ($finding IS NULL OR finding = $finding)
    AND spec_high BETWEEN $high_from AND $high_to
    AND spec_low BETWEEN $low_from AND $low_to
ORDER BY finding, spec_high, spec_low
LIMIT 3;
