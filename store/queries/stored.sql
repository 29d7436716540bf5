-- Planned rows that the sweep has already.
SELECT p.row
FROM planned AS p
SEMI JOIN (SELECT finding, spec_high, spec_low FROM outcome WHERE sweep = $sweep) AS o
    ON o.finding = p.finding AND o.spec_low = p.spec_low AND o.spec_high = p.spec_high;
