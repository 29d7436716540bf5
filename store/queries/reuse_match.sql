-- For each planned row that is not stored yet: the latest other sweep and finding that has it.
-- Failed rows are computed again; a rule of another plan's author says nothing about this plan.
-- The data are compared by the series that the row's choice of measures reads, so that a plan with
-- a further measure takes over what it shares.  A row whose details are wanted is taken from a
-- sweep that kept them; a row without numbers has none to keep.
CREATE OR REPLACE TEMP TABLE reuse_match AS
WITH sources AS (
    SELECT f.finding, g.sweep AS source_sweep, g.finding AS source_finding, f.code AS measures
    FROM sweep_choice AS f
    JOIN sweep AS s ON s.sweep = f.sweep
    JOIN sweep_choice AS g
        ON g.axis = 'measures' AND g.code = f.code
        AND g.data_high = f.data_high AND g.data_low = f.data_low
    JOIN sweep AS u ON u.sweep = g.sweep AND u.numerics = s.numerics
    WHERE f.axis = 'measures' AND f.sweep = $sweep AND g.sweep <> $sweep
),
missing AS (
    SELECT p.*
    FROM planned AS p
    ANTI JOIN (SELECT finding, spec_high, spec_low FROM outcome WHERE sweep = $sweep) AS o
        ON o.finding = p.finding AND o.spec_low = p.spec_low AND o.spec_high = p.spec_high
),
candidates AS (
    SELECT
        o.spec_high, o.spec_low, s.finding, o.sweep AS source_sweep, o.finding AS source_finding,
        o.status = 0 OR o.reverse_status = 0 AS numbers
    FROM outcome AS o
    JOIN sources AS s
        ON s.source_sweep = o.sweep AND s.source_finding = o.finding AND s.measures = o.measures
    LEFT JOIN reason AS r ON r.code = o.reason
    WHERE o.status <> 3 AND o.reverse_status <> 3 AND NOT coalesce(r.ruled, FALSE)
),
kept AS (
    SELECT DISTINCT sweep, finding, spec_high, spec_low
    FROM details
    WHERE EXISTS (SELECT 1 FROM missing WHERE details)
),
latest AS (
    -- One number orders sources by sweep, then finding.
    SELECT m.row, max(c.source_sweep::BIGINT * 65536 + c.source_finding) AS source
    FROM missing AS m
    JOIN candidates AS c
        ON c.spec_low = m.spec_low AND c.spec_high = m.spec_high AND c.finding = m.finding
    LEFT JOIN kept AS k
        ON k.sweep = c.source_sweep AND k.finding = c.source_finding
        AND k.spec_low = m.spec_low AND k.spec_high = m.spec_high
    WHERE NOT m.details OR NOT c.numbers OR k.sweep IS NOT NULL
    GROUP BY m.row
)
SELECT
    m.row, m.finding, m.spec_high, m.spec_low, m.position, m.request, m.details,
    (l.source // 65536)::INTEGER AS source_sweep, (l.source % 65536)::SMALLINT AS source_finding
FROM latest AS l
JOIN missing AS m ON m.row = l.row;
