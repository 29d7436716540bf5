-- Admissible rows and flips by the number of axes changed, and the same for sets of changed
-- choices, in which the positions of a moving window count once.
, sets AS (
    SELECT
        changes, lags, deterministics, "window", transformation, test, conditioning, measures,
        count(*) AS rows, count(*) FILTER (turns) AS flips
    FROM changed
    WHERE admissible AND changes > 0
    GROUP BY ALL
)
SELECT
    changes,
    sum(rows)::BIGINT AS rows,
    sum(flips)::BIGINT AS flips,
    count(*) AS sets,
    count(*) FILTER (flips > 0) AS turning
FROM sets
GROUP BY changes
ORDER BY changes;
