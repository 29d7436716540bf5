-- Counts of the planned rows by combination of choices, for each set of axes that the reader
-- puts in; $axes are those that occur in a set.  An axis that is not in a set is summed over,
-- and its position is then -1.  Rows of one combination are kept apart by weight, so that the
-- weighted share of any selection is a sum over cells.
--
-- kind is what a row counts as, in bits: 1 not applicable, 2 infeasible, 3 failed, 4 screened
-- out; otherwise admissible, with 8 where a direction is undetermined, and from 16 on four bits
-- a level (the plan's own, 1%, 5%, 10%): the claim holds, it holds but for the sign, p <= level,
-- reverse p <= level.  Materialized, or it would be made again for every column.
WITH planned_rows AS MATERIALIZED (
    SELECT
        CASE WHEN list_contains($axes::VARCHAR[], 'lags') THEN lags END AS lags,
        CASE WHEN list_contains($axes::VARCHAR[], 'deterministics') THEN deterministics END
            AS deterministics,
        CASE WHEN list_contains($axes::VARCHAR[], 'window') THEN "window" END AS "window",
        CASE WHEN list_contains($axes::VARCHAR[], 'transformation') THEN transformation END
            AS transformation,
        CASE WHEN list_contains($axes::VARCHAR[], 'test') THEN test END AS test,
        CASE WHEN list_contains($axes::VARCHAR[], 'conditioning') THEN conditioning END
            AS conditioning,
        CASE WHEN list_contains($axes::VARCHAR[], 'measures') THEN measures END AS measures,
        weight,
        CASE WHEN screened_out THEN 4
             WHEN NOT admissible THEN counted_status
             ELSE CASE WHEN verdict = 'undetermined' THEN 8 ELSE
                      CASE WHEN p_value <= level THEN 64 ELSE 0 END
                      + CASE WHEN reverse_p_value <= level THEN 128 ELSE 0 END
                      + CASE WHEN p_value <= 0.01 THEN 1024 ELSE 0 END
                      + CASE WHEN reverse_p_value <= 0.01 THEN 2048 ELSE 0 END
                      + CASE WHEN p_value <= 0.05 THEN 16384 ELSE 0 END
                      + CASE WHEN reverse_p_value <= 0.05 THEN 32768 ELSE 0 END
                      + CASE WHEN p_value <= 0.10 THEN 262144 ELSE 0 END
                      + CASE WHEN reverse_p_value <= 0.10 THEN 524288 ELSE 0 END
                  END
               + CASE WHEN holds_from <= level AND level < holds_below
                      THEN CASE WHEN sign_holds THEN 16 ELSE 32 END ELSE 0 END
               + CASE WHEN holds_from <= 0.01 AND 0.01 < holds_below
                      THEN CASE WHEN sign_holds THEN 256 ELSE 512 END ELSE 0 END
               + CASE WHEN holds_from <= 0.05 AND 0.05 < holds_below
                      THEN CASE WHEN sign_holds THEN 4096 ELSE 8192 END ELSE 0 END
               + CASE WHEN holds_from <= 0.10 AND 0.10 < holds_below
                      THEN CASE WHEN sign_holds THEN 65536 ELSE 131072 END ELSE 0 END
        END AS kind
    FROM judged
    WHERE sweep = $sweep AND finding = $finding AND request = 0
),
combinations AS (
    SELECT
        lags, deterministics, "window", transformation, test, conditioning, measures, weight,
        count(*) AS planned,
        count(*) FILTER (kind = 1) AS not_applicable,
        count(*) FILTER (kind = 2) AS infeasible,
        count(*) FILTER (kind = 3) AS failed,
        count(*) FILTER (kind = 4) AS screened_out,
        count(*) FILTER (kind & 7 = 0) AS admissible,
        count(*) FILTER (kind & 8 <> 0) AS undetermined,
        count(*) FILTER (kind & 16 <> 0) AS survived,
        count(*) FILTER (kind & 32 <> 0) AS other_sign,
        count(*) FILTER (kind & 192 = 64) AS one_way,
        count(*) FILTER (kind & 192 = 128) AS reverse,
        count(*) FILTER (kind & 192 = 192) AS both_ways,
        count(*) FILTER (kind & 256 <> 0) AS survived_1,
        count(*) FILTER (kind & 512 <> 0) AS other_sign_1,
        count(*) FILTER (kind & 3072 = 1024) AS one_way_1,
        count(*) FILTER (kind & 3072 = 2048) AS reverse_1,
        count(*) FILTER (kind & 3072 = 3072) AS both_ways_1,
        count(*) FILTER (kind & 4096 <> 0) AS survived_5,
        count(*) FILTER (kind & 8192 <> 0) AS other_sign_5,
        count(*) FILTER (kind & 49152 = 16384) AS one_way_5,
        count(*) FILTER (kind & 49152 = 32768) AS reverse_5,
        count(*) FILTER (kind & 49152 = 49152) AS both_ways_5,
        count(*) FILTER (kind & 65536 <> 0) AS survived_10,
        count(*) FILTER (kind & 131072 <> 0) AS other_sign_10,
        count(*) FILTER (kind & 786432 = 262144) AS one_way_10,
        count(*) FILTER (kind & 786432 = 524288) AS reverse_10,
        count(*) FILTER (kind & 786432 = 786432) AS both_ways_10
    FROM planned_rows
    GROUP BY ALL
),
cells AS (
    SELECT
        lags, deterministics, "window", transformation, test, conditioning, measures, weight,
        sum(planned)::BIGINT AS planned,
        sum(not_applicable)::BIGINT AS not_applicable,
        sum(infeasible)::BIGINT AS infeasible,
        sum(failed)::BIGINT AS failed,
        sum(screened_out)::BIGINT AS screened_out,
        sum(admissible)::BIGINT AS admissible,
        sum(undetermined)::BIGINT AS undetermined,
        sum(survived)::BIGINT AS survived,
        sum(other_sign)::BIGINT AS other_sign,
        sum(one_way)::BIGINT AS one_way,
        sum(reverse)::BIGINT AS reverse,
        sum(both_ways)::BIGINT AS both_ways,
        sum(survived_1)::BIGINT AS survived_1,
        sum(other_sign_1)::BIGINT AS other_sign_1,
        sum(one_way_1)::BIGINT AS one_way_1,
        sum(reverse_1)::BIGINT AS reverse_1,
        sum(both_ways_1)::BIGINT AS both_ways_1,
        sum(survived_5)::BIGINT AS survived_5,
        sum(other_sign_5)::BIGINT AS other_sign_5,
        sum(one_way_5)::BIGINT AS one_way_5,
        sum(reverse_5)::BIGINT AS reverse_5,
        sum(both_ways_5)::BIGINT AS both_ways_5,
        sum(survived_10)::BIGINT AS survived_10,
        sum(other_sign_10)::BIGINT AS other_sign_10,
        sum(one_way_10)::BIGINT AS one_way_10,
        sum(reverse_10)::BIGINT AS reverse_10,
        sum(both_ways_10)::BIGINT AS both_ways_10
    FROM combinations
    GROUP BY GROUPING SETS (/*sets*/)
),
places AS (
    SELECT axis, code, position FROM sweep_choice WHERE sweep = $sweep AND finding = $finding
)
SELECT
    coalesce(l.position, -1) AS lags,
    coalesce(d.position, -1) AS deterministics,
    coalesce(w.position, -1) AS "window",
    coalesce(x.position, -1) AS transformation,
    coalesce(t.position, -1) AS test,
    coalesce(c.position, -1) AS conditioning,
    coalesce(m.position, -1) AS measures,
    k.* EXCLUDE (
        lags, deterministics, "window", transformation, test, conditioning, measures)
FROM cells AS k
LEFT JOIN places AS l ON l.axis = 'lags' AND l.code = k.lags
LEFT JOIN places AS d ON d.axis = 'deterministics' AND d.code = k.deterministics
LEFT JOIN places AS w ON w.axis = 'window' AND w.code = k."window"
LEFT JOIN places AS x ON x.axis = 'transformation' AND x.code = k.transformation
LEFT JOIN places AS t ON t.axis = 'test' AND t.code = k.test
LEFT JOIN places AS c ON c.axis = 'conditioning' AND c.code = k.conditioning
LEFT JOIN places AS m ON m.axis = 'measures' AND m.code = k.measures
ORDER BY ALL;
