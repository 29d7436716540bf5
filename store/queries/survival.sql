-- For each sweep, finding, axis and choice: what was counted and what survived.
-- Only planned rows count (request 0).  The row of axis 'all' and choice 'all' is the overall one.
-- planned is what the plan asks for; rows that an unfinished run has not come to are not_run.
--
-- Rows are grouped once, on codes and on how they count; every axis then sums the groups.
-- headline_share = sum(weight * survived) / sum(weight * admissible); the weight is the same for
-- all rows of a group, because only the window entry and the test choose it.  Weights are summed
-- last and in order, so that a share has the same digits whatever the number of threads, and is
-- exactly 1 where every row survives.
-- Distinct computations do not add up over groups: each computation is given the set of codes it
-- serves, as bits, and computations with equal sets are counted together.  Codes from 63 on,
-- which have no bit, are counted one by one.
CREATE VIEW survival AS
WITH planned_rows AS (
    SELECT
        sweep, finding,
        lags, deterministics, "window", transformation, test, conditioning, measures,
        weight, computation, p_value, admissible,
        counted_status
            + CASE WHEN screened_out THEN 4 ELSE 0 END
            + CASE WHEN admissible THEN
                8 + CASE WHEN survives THEN 16 ELSE 0 END
                  + CASE WHEN other_sign THEN 32 ELSE 0 END
                  + CASE WHEN sign_holds THEN
                      CASE WHEN holds_from <= 0.01 AND 0.01 < holds_below THEN 64 ELSE 0 END
                      + CASE WHEN holds_from <= 0.05 AND 0.05 < holds_below THEN 128 ELSE 0 END
                      + CASE WHEN holds_from <= 0.10 AND 0.10 < holds_below THEN 256 ELSE 0 END
                    ELSE 0 END
              ELSE 0 END AS kind
    FROM judged
    WHERE request = 0
),
grouped AS (
    SELECT
        sweep, finding,
        lags, deterministics, "window", transformation, test, conditioning, measures,
        kind, any_value(weight) AS weight, count(*) AS planned
    FROM planned_rows
    GROUP BY sweep, finding,
        lags, deterministics, "window", transformation, test, conditioning, measures, kind
),
by_weight AS (
    SELECT
        sweep, finding,
        CASE WHEN grouping(lags) = 0 THEN 'lags'
             WHEN grouping(deterministics) = 0 THEN 'deterministics'
             WHEN grouping("window") = 0 THEN 'window'
             WHEN grouping(transformation) = 0 THEN 'transformation'
             WHEN grouping(test) = 0 THEN 'test'
             WHEN grouping(conditioning) = 0 THEN 'conditioning'
             WHEN grouping(measures) = 0 THEN 'measures'
             ELSE 'all' END AS axis,
        coalesce(lags, deterministics, "window", transformation, test, conditioning, measures, 0)
            AS code,
        weight,
        sum(planned) AS planned,
        sum(planned) FILTER (kind & 3 = 1) AS not_applicable,
        sum(planned) FILTER (kind & 3 = 2) AS infeasible,
        sum(planned) FILTER (kind & 3 = 3) AS failed,
        sum(planned) FILTER (kind & 4 <> 0) AS screened_out,
        sum(planned) FILTER (kind & 8 <> 0) AS admissible,
        sum(planned) FILTER (kind & 16 <> 0) AS survived,
        sum(planned) FILTER (kind & 32 <> 0) AS other_sign,
        sum(planned) FILTER (kind & 64 <> 0) AS survived_1,
        sum(planned) FILTER (kind & 128 <> 0) AS survived_5,
        sum(planned) FILTER (kind & 256 <> 0) AS survived_10
    FROM grouped
    GROUP BY GROUPING SETS (
        (sweep, finding, weight),
        (sweep, finding, weight, lags),
        (sweep, finding, weight, deterministics),
        (sweep, finding, weight, "window"),
        (sweep, finding, weight, transformation),
        (sweep, finding, weight, test),
        (sweep, finding, weight, conditioning),
        (sweep, finding, weight, measures)
    )
),
sums AS (
    SELECT
        sweep, finding, axis, code,
        sum(planned) AS planned,
        sum(not_applicable) AS not_applicable,
        sum(infeasible) AS infeasible,
        sum(failed) AS failed,
        sum(screened_out) AS screened_out,
        sum(admissible) AS admissible,
        sum(survived) AS survived,
        sum(other_sign) AS other_sign,
        sum(weight * admissible ORDER BY weight) AS weighted,
        sum(weight * survived ORDER BY weight) AS weighted_survived,
        sum(weight * survived_1 ORDER BY weight) AS weighted_1,
        sum(weight * survived_5 ORDER BY weight) AS weighted_5,
        sum(weight * survived_10 ORDER BY weight) AS weighted_10
    FROM by_weight
    GROUP BY sweep, finding, axis, code
),
medians AS (
    SELECT
        sweep, finding,
        CASE WHEN grouping(lags) = 0 THEN 'lags'
             WHEN grouping(deterministics) = 0 THEN 'deterministics'
             WHEN grouping("window") = 0 THEN 'window'
             WHEN grouping(transformation) = 0 THEN 'transformation'
             WHEN grouping(test) = 0 THEN 'test'
             WHEN grouping(conditioning) = 0 THEN 'conditioning'
             WHEN grouping(measures) = 0 THEN 'measures'
             ELSE 'all' END AS axis,
        coalesce(lags, deterministics, "window", transformation, test, conditioning, measures, 0)
            AS code,
        median(p_value) AS median_p_value
    FROM planned_rows
    WHERE admissible
    GROUP BY GROUPING SETS (
        (sweep, finding),
        (sweep, finding, lags),
        (sweep, finding, deterministics),
        (sweep, finding, "window"),
        (sweep, finding, transformation),
        (sweep, finding, test),
        (sweep, finding, conditioning),
        (sweep, finding, measures)
    )
),
computations AS (
    SELECT
        sweep, finding, computation,
        bit_or(CASE WHEN lags < 63 THEN 1::BIGINT << lags ELSE 0 END) AS lags,
        bit_or(CASE WHEN deterministics < 63 THEN 1::BIGINT << deterministics ELSE 0 END)
            AS deterministics,
        bit_or(CASE WHEN "window" < 63 THEN 1::BIGINT << "window" ELSE 0 END) AS "window",
        bit_or(CASE WHEN transformation < 63 THEN 1::BIGINT << transformation ELSE 0 END)
            AS transformation,
        bit_or(CASE WHEN test < 63 THEN 1::BIGINT << test ELSE 0 END) AS test,
        bit_or(CASE WHEN conditioning < 63 THEN 1::BIGINT << conditioning ELSE 0 END)
            AS conditioning,
        bit_or(CASE WHEN measures < 63 THEN 1::BIGINT << measures ELSE 0 END) AS measures
    FROM planned_rows
    WHERE admissible
    GROUP BY sweep, finding, computation
),
patterns AS (
    SELECT
        sweep, finding,
        lags, deterministics, "window", transformation, test, conditioning, measures,
        count(*) AS computations
    FROM computations
    GROUP BY sweep, finding,
        lags, deterministics, "window", transformation, test, conditioning, measures
),
distincts AS (
    SELECT sweep, finding, 'all' AS axis, 0 AS code, sum(computations) AS "distinct"
    FROM patterns
    GROUP BY sweep, finding
    UNION ALL
    SELECT c.sweep, c.finding, c.axis, c.code, sum(p.computations)
    FROM sweep_choice AS c
    JOIN patterns AS p
        ON p.sweep = c.sweep AND p.finding = c.finding
        AND (CASE c.axis
                WHEN 'lags' THEN p.lags
                WHEN 'deterministics' THEN p.deterministics
                WHEN 'window' THEN p."window"
                WHEN 'transformation' THEN p.transformation
                WHEN 'test' THEN p.test
                WHEN 'conditioning' THEN p.conditioning
                ELSE p.measures END & (1::BIGINT << c.code)) <> 0
    WHERE c.code < 63
    GROUP BY c.sweep, c.finding, c.axis, c.code
    UNION ALL
    SELECT c.sweep, c.finding, c.axis, c.code, count(DISTINCT r.computation)
    FROM (SELECT sweep, finding, axis, code FROM sweep_choice WHERE code >= 63) AS c
    JOIN planned_rows AS r
        ON r.sweep = c.sweep AND r.finding = c.finding
        AND CASE c.axis
                WHEN 'lags' THEN r.lags
                WHEN 'deterministics' THEN r.deterministics
                WHEN 'window' THEN r."window"
                WHEN 'transformation' THEN r.transformation
                WHEN 'test' THEN r.test
                WHEN 'conditioning' THEN r.conditioning
                ELSE r.measures END = c.code
    WHERE r.admissible
    GROUP BY c.sweep, c.finding, c.axis, c.code
),
wanted AS (
    SELECT
        sweep, finding, 'all' AS axis, 0 AS code, 'all' AS choice, 0 AS choice_position,
        FALSE AS is_baseline, planned
    FROM finding
    UNION ALL
    SELECT sweep, finding, axis, code, label, position, is_baseline, planned FROM sweep_choice
)
SELECT
    w.sweep,
    w.finding,
    w.axis,
    w.choice,
    w.code,
    w.choice_position,
    w.is_baseline,
    greatest(w.planned, coalesce(s.planned, 0))::BIGINT AS planned,
    coalesce(s.not_applicable, 0)::BIGINT AS not_applicable,
    coalesce(s.infeasible, 0)::BIGINT AS infeasible,
    coalesce(s.failed, 0)::BIGINT AS failed,
    coalesce(s.screened_out, 0)::BIGINT AS screened_out,
    greatest(w.planned - coalesce(s.planned, 0), 0)::BIGINT AS not_run,
    coalesce(s.admissible, 0)::BIGINT AS admissible,
    coalesce(s.survived, 0)::BIGINT AS survived,
    coalesce(s.other_sign, 0)::BIGINT AS other_sign,
    coalesce(d."distinct", 0)::BIGINT AS "distinct",
    CASE WHEN s.admissible > 0 THEN coalesce(s.survived, 0) / s.admissible END AS raw_share,
    CASE WHEN s.weighted > 0 THEN coalesce(s.weighted_survived, 0) / s.weighted END
        AS headline_share,
    CASE WHEN s.weighted > 0 THEN coalesce(s.weighted_1, 0) / s.weighted END AS share_at_1,
    CASE WHEN s.weighted > 0 THEN coalesce(s.weighted_5, 0) / s.weighted END AS share_at_5,
    CASE WHEN s.weighted > 0 THEN coalesce(s.weighted_10, 0) / s.weighted END AS share_at_10,
    m.median_p_value
FROM wanted AS w
LEFT JOIN sums AS s
    ON s.sweep = w.sweep AND s.finding = w.finding AND s.axis = w.axis AND s.code = w.code
LEFT JOIN medians AS m
    ON m.sweep = w.sweep AND m.finding = w.finding AND m.axis = w.axis AND m.code = w.code
LEFT JOIN distincts AS d
    ON d.sweep = w.sweep AND d.finding = w.finding AND d.axis = w.axis AND d.code = w.code
WHERE w.planned > 0 OR s.planned > 0;
