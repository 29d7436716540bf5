-- The rows that each request added: what was counted and what survived, all choices together.
-- Requests that added nothing (all that they ask is planned) have zeros.
SELECT
    q.request,
    q.name AS request_name,
    q.asked_by,
    q.asks,
    count(j.finding) AS added,
    count(*) FILTER (j.counted_status = 1) AS not_applicable,
    count(*) FILTER (j.counted_status = 2) AS infeasible,
    count(*) FILTER (j.counted_status = 3) AS failed,
    count(*) FILTER (j.screened_out) AS screened_out,
    count(*) FILTER (j.admissible) AS admissible,
    count(*) FILTER (j.admissible AND j.survives) AS survived,
    count(DISTINCT j.computation) FILTER (j.admissible) AS "distinct",
    CASE WHEN count(*) FILTER (j.admissible) > 0
         THEN count(*) FILTER (j.admissible AND j.survives) / count(*) FILTER (j.admissible)
         END AS raw_share,
    CASE WHEN sum(j.weight) FILTER (j.admissible) > 0
         THEN coalesce(sum(j.weight) FILTER (j.admissible AND j.survives), 0)
              / sum(j.weight) FILTER (j.admissible) END AS weighted_share,
    (SELECT count(*) > 0 FROM request_choice AS c
     WHERE c.sweep = $sweep AND c.finding = $finding AND c.request = q.request) AS concerned
FROM request AS q
LEFT JOIN judged AS j
    ON j.sweep = $sweep AND j.finding = $finding AND j.request = q.request
WHERE q.sweep = $sweep
GROUP BY q.request, q.name, q.asked_by, q.asks
ORDER BY q.request;
