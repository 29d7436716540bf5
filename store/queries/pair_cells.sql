-- Planned rows by every pair of axes: what was counted and what survived in each cell.
-- Rows are grouped once on codes, as in the view survival; every pair then sums the groups.
-- Weights are summed last and in order, so that a share has the same digits whatever the number
-- of threads.  Designs that change few choices at a time give no weights; there every row counts
-- alike.  The codes of the axes that a pair does not hold are NULL.
WITH grouped AS (
    SELECT
        lags, deterministics, "window", transformation, test, conditioning, measures,
        any_value(weight) AS weight,
        count(*) AS planned,
        count(*) FILTER (counted_status = 1) AS not_applicable,
        count(*) FILTER (screened_out) AS screened_out,
        count(*) FILTER (admissible) AS admissible,
        count(*) FILTER (admissible AND survives) AS survived
    FROM judged
    WHERE sweep = $sweep AND finding = $finding AND request = 0
    GROUP BY ALL
),
by_weight AS (
    SELECT
        lags, deterministics, "window", transformation, test, conditioning, measures, weight,
        sum(planned) AS planned,
        sum(not_applicable) AS not_applicable,
        sum(screened_out) AS screened_out,
        sum(admissible) AS admissible,
        sum(survived) AS survived
    FROM grouped
    GROUP BY GROUPING SETS (
        (weight, lags, deterministics), (weight, lags, "window"), (weight, lags, transformation),
        (weight, lags, test), (weight, lags, conditioning), (weight, lags, measures),
        (weight, deterministics, "window"), (weight, deterministics, transformation),
        (weight, deterministics, test), (weight, deterministics, conditioning),
        (weight, deterministics, measures),
        (weight, "window", transformation), (weight, "window", test),
        (weight, "window", conditioning), (weight, "window", measures),
        (weight, transformation, test), (weight, transformation, conditioning),
        (weight, transformation, measures),
        (weight, test, conditioning), (weight, test, measures),
        (weight, conditioning, measures)
    )
)
SELECT
    lags, deterministics, "window", transformation, test, conditioning, measures,
    sum(planned)::BIGINT AS planned,
    sum(not_applicable)::BIGINT AS not_applicable,
    sum(screened_out)::BIGINT AS screened_out,
    sum(admissible)::BIGINT AS admissible,
    sum(survived)::BIGINT AS survived,
    CASE WHEN sum(weight * admissible) > 0 THEN sum(weight * admissible ORDER BY weight)
         ELSE sum(admissible) END AS weight,
    CASE WHEN sum(weight * admissible) > 0
         THEN sum(weight * survived ORDER BY weight) / sum(weight * admissible ORDER BY weight)
         WHEN sum(admissible) > 0 THEN sum(survived) / sum(admissible) END AS share
FROM by_weight
GROUP BY ALL;
