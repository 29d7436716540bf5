-- Rows of two sweeps (temporary views mine and theirs) matched by specification alone, so that
-- vintages of data can be compared.  Other queries on comparisons start from here: the text is
-- put in front of them as the common table "pairs".
WITH pairs AS (
    SELECT
        m.spec_high, m.spec_low,
        m.finding AS my_finding, t.finding AS their_finding,
        m.position AS my_position, t.position AS their_position,
        m.lags, m.deterministics, m."window", m.transformation, m.test, m.conditioning, m.measures,
        m.p_value AS my_p, t.p_value AS their_p,
        m.reverse_p_value AS my_reverse_p, t.reverse_p_value AS their_reverse_p,
        m.statistic AS my_statistic, t.statistic AS their_statistic,
        m.coefficient_sum AS my_sum, t.coefficient_sum AS their_sum,
        m.observations AS my_observations, t.observations AS their_observations,
        m.order_used AS my_order, t.order_used AS their_order,
        m.admissible AS my_admissible, t.admissible AS their_admissible,
        m.survives AS my_survives, t.survives AS their_survives,
        m.verdict AS my_verdict, t.verdict AS their_verdict,
        m.counted_status AS my_status, t.counted_status AS their_status
    FROM mine AS m
    JOIN theirs AS t ON t.spec_low = m.spec_low AND t.spec_high = m.spec_high
    WHERE m.finding = $mine AND t.finding = $theirs
)
