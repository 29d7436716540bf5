-- Planned rows of one finding by window entry and weight, the strata of a drawn sample, with the
-- size of the cross that each entry has.  The baseline, which is run whatever is drawn, has rows
-- of its own.  Rows of one entry differ in weight by the size of their test group alone.
WITH sizes AS (
    SELECT axis, count(*) AS choices
    FROM sweep_choice
    WHERE sweep = $sweep AND finding = $finding AND request = 0 AND axis <> 'window'
    GROUP BY axis
),
others AS (
    SELECT product(choices) AS rows FROM sizes
),
counted AS (
    SELECT
        j."window", j.weight,
        j.spec_high = f.baseline_high AND j.spec_low = f.baseline_low AS is_baseline,
        count(*) AS rows,
        count(*) FILTER (j.admissible) AS admissible,
        count(*) FILTER (j.admissible AND j.survives) AS survived
    FROM judged AS j
    JOIN finding AS f ON f.sweep = j.sweep AND f.finding = j.finding
    WHERE j.sweep = $sweep AND j.finding = $finding AND j.request = 0
    GROUP BY ALL
)
SELECT
    c.label AS window_name,
    k.is_baseline,
    k.weight,
    k.rows,
    k.admissible,
    k.survived,
    o.rows * c.positions AS size
FROM counted AS k
CROSS JOIN others AS o
JOIN sweep_choice AS c
    ON c.sweep = $sweep AND c.finding = $finding AND c.axis = 'window' AND c.code = k."window"
ORDER BY c.position, k.is_baseline, k.weight;
