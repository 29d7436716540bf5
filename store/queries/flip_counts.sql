-- How many sets of one and of two changed choices there are, could be judged, and turn.
SELECT
    changes,
    count(*) AS sets,
    count(*) FILTER (admissible > 0) AS admissible,
    count(*) FILTER (flips > 0) AS turning,
    count(*) FILTER (joint > 0) AS joint,
    count(*) FILTER (joint = 0 AND contained > 0) AS contained,
    count(*) FILTER (joint = 0 AND contained = 0 AND unsettled > 0) AS unsettled,
    sum(admissible)::BIGINT AS rows,
    sum(flips)::BIGINT AS flips
FROM sets
GROUP BY changes
ORDER BY changes;
