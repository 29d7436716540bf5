-- What each request asks for, beside the baseline: every way to put the request's choices into
-- the baseline, one axis or several.  Rows count whether they were planned or added.  Positions
-- of a moving window are one row; its p-values and sum are over the admissible positions, over all
-- that could be run where none is admissible.
WITH wanted AS (
    SELECT
        request,
        list(code) FILTER (axis = 'lags') AS lags,
        list(code) FILTER (axis = 'deterministics') AS deterministics,
        list(code) FILTER (axis = 'window') AS "window",
        list(code) FILTER (axis = 'transformation') AS transformation,
        list(code) FILTER (axis = 'test') AS test,
        list(code) FILTER (axis = 'conditioning') AS conditioning,
        list(code) FILTER (axis = 'measures') AS measures
    FROM request_choice
    WHERE sweep = $sweep AND finding = $finding
    GROUP BY request
),
home AS (
    SELECT
        max(code) FILTER (axis = 'lags') AS lags,
        max(code) FILTER (axis = 'deterministics') AS deterministics,
        max(code) FILTER (axis = 'window') AS "window",
        max(code) FILTER (axis = 'transformation') AS transformation,
        max(code) FILTER (axis = 'test') AS test,
        max(code) FILTER (axis = 'conditioning') AS conditioning,
        max(code) FILTER (axis = 'measures') AS measures
    FROM sweep_choice
    WHERE sweep = $sweep AND finding = $finding AND is_baseline
),
base AS (
    SELECT j.p_value AS baseline_p_value, j.survives AS baseline_survives
    FROM judged AS j, home AS h
    WHERE j.sweep = $sweep AND j.finding = $finding AND j.request = 0
        AND j.lags = h.lags AND j.deterministics = h.deterministics AND j."window" = h."window"
        AND j.transformation = h.transformation AND j.test = h.test
        AND j.conditioning = h.conditioning AND j.measures = h.measures
),
asked AS (
    SELECT
        q.request AS asked_by_request, j.*,
        j.lags <> h.lags AS lags_differ,
        j.deterministics <> h.deterministics AS deterministics_differ,
        j."window" <> h."window" AS window_differs,
        j.transformation <> h.transformation AS transformation_differs,
        j.test <> h.test AS test_differs,
        j.conditioning <> h.conditioning AS conditioning_differs,
        j.measures <> h.measures AS measures_differ,
        CASE WHEN j.admissible THEN 0 WHEN j.screened_out THEN 1 ELSE 1 + j.counted_status END
            AS loss
    FROM judged AS j, home AS h, wanted AS q
    WHERE j.sweep = $sweep AND j.finding = $finding
        AND (j.lags = h.lags OR list_contains(q.lags, j.lags))
        AND (j.deterministics = h.deterministics
             OR list_contains(q.deterministics, j.deterministics))
        AND (j."window" = h."window" OR list_contains(q."window", j."window"))
        AND (j.transformation = h.transformation
             OR list_contains(q.transformation, j.transformation))
        AND (j.test = h.test OR list_contains(q.test, j.test))
        AND (j.conditioning = h.conditioning OR list_contains(q.conditioning, j.conditioning))
        AND (j.measures = h.measures OR list_contains(q.measures, j.measures))
),
shown_asked AS (
    SELECT
        *,
        CASE WHEN bool_or(admissible) OVER (
                PARTITION BY asked_by_request, lags, deterministics, "window", transformation,
                    test, conditioning, measures) THEN admissible
             ELSE counted_status = 0 END AS shown
    FROM asked
),
summed AS (
    SELECT
        asked_by_request AS request,
        lags, deterministics, "window", transformation, test, conditioning, measures,
        any_value(lags_differ::INTEGER + deterministics_differ::INTEGER + window_differs::INTEGER
            + transformation_differs::INTEGER + test_differs::INTEGER
            + conditioning_differs::INTEGER + measures_differ::INTEGER) AS changes,
        count(*) AS positions,
        count(*) FILTER (admissible) AS admissible,
        count(*) FILTER (admissible AND survives) AS survived,
        bool_and(request = 0) AS planned,
        median(p_value) FILTER (shown) AS p_value,
        min(p_value) FILTER (shown) AS p_low,
        max(p_value) FILTER (shown) AS p_high,
        median(reverse_p_value) FILTER (shown) AS reverse_p_value,
        median(coefficient_sum * orientation) FILTER (shown) AS coefficient_sum,
        CASE WHEN count(*) = 1 THEN any_value(coefficient_sum_se) END AS coefficient_sum_se,
        CASE WHEN count(*) = 1 THEN any_value(statistic) END AS statistic,
        CASE WHEN count(*) = 1 THEN any_value(df_num) END AS df_num,
        CASE WHEN count(*) = 1 THEN any_value(df_den) END AS df_den,
        CASE WHEN min(observations) = max(observations) THEN any_value(observations) END
            AS observations,
        CASE WHEN min(order_used) = max(order_used) THEN any_value(order_used) END AS order_used,
        min(loss) AS loss,
        arg_min(reason, loss) AS reason,
        bool_or(lacks_sign) AS lacks_sign,
        CASE WHEN count(*) = 1 THEN printf('%016x%016x', any_value(spec_high), any_value(spec_low))
            END AS specification
    FROM shown_asked
    GROUP BY ALL
    HAVING changes > 0
),
labels AS (
    SELECT axis, code, label, is_baseline, position FROM sweep_choice
    WHERE sweep = $sweep AND finding = $finding
),
steps AS (
    SELECT
        s.request, s.lags, s.deterministics, s."window", s.transformation, s.test,
        s.conditioning, s.measures,
        string_agg(l.axis || ' ' || l.label, '; ' ORDER BY
            list_position(['lags', 'deterministics', 'window', 'transformation', 'test',
                           'conditioning', 'measures'], l.axis)) AS changed,
        list(list_position(['lags', 'deterministics', 'window', 'transformation', 'test',
                            'conditioning', 'measures'], l.axis) * 100000 + l.position ORDER BY
            list_position(['lags', 'deterministics', 'window', 'transformation', 'test',
                           'conditioning', 'measures'], l.axis)) AS places
    FROM summed AS s
    JOIN labels AS l
        ON NOT l.is_baseline
        AND l.code = CASE l.axis
            WHEN 'lags' THEN s.lags
            WHEN 'deterministics' THEN s.deterministics
            WHEN 'window' THEN s."window"
            WHEN 'transformation' THEN s.transformation
            WHEN 'test' THEN s.test
            WHEN 'conditioning' THEN s.conditioning
            ELSE s.measures END
    GROUP BY ALL
)
SELECT
    s.request,
    q.name AS request_name,
    q.asked_by,
    q.asks,
    s.changes,
    t.changed,
    s.planned,
    s.positions, s.admissible, s.survived,
    s.order_used, s.observations, s.statistic, s.df_num, s.df_den,
    s.p_value, s.p_low, s.p_high, s.reverse_p_value, s.coefficient_sum, s.coefficient_sum_se,
    ['ok', 'screened out', 'not applicable', 'infeasible', 'failed'][s.loss + 1] AS status,
    CASE WHEN s.lacks_sign AND s.loss = 2 THEN 'the claim has a sign and this test gives none'
         ELSE coalesce(r.text, '') END AS reason,
    s.specification,
    b.baseline_p_value,
    b.baseline_survives
FROM summed AS s
JOIN request AS q ON q.sweep = $sweep AND q.request = s.request
JOIN steps AS t
    ON t.request = s.request AND t.lags = s.lags AND t.deterministics = s.deterministics
    AND t."window" = s."window" AND t.transformation = s.transformation AND t.test = s.test
    AND t.conditioning = s.conditioning AND t.measures = s.measures
LEFT JOIN base AS b ON TRUE
LEFT JOIN reason AS r ON r.code = s.reason
ORDER BY s.request, s.changes, t.places, t.changed;
