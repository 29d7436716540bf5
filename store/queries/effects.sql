-- Sums of lag coefficients within one scale: transformation, measures and form of the test.
-- Signs are turned where a measure is inverted, so that they speak of the role.
WITH labels AS (
    SELECT axis, code, label, is_baseline, position, scale_group FROM sweep_choice
    WHERE sweep = $sweep AND finding = $finding
),
sized AS (
    SELECT
        x.label AS transformation, m.label AS measures, t.scale_group AS form,
        x.position AS transformation_position, m.position AS measures_position,
        j.coefficient_sum * j.orientation AS effect,
        x.is_baseline AND m.is_baseline AND t.is_baseline AS of_baseline
    FROM judged AS j
    JOIN labels AS x ON x.axis = 'transformation' AND x.code = j.transformation
    JOIN labels AS m ON m.axis = 'measures' AND m.code = j.measures
    JOIN labels AS t ON t.axis = 'test' AND t.code = j.test
    WHERE j.sweep = $sweep AND j.finding = $finding AND j.request = 0 AND j.admissible
        AND j.coefficient_sum IS NOT NULL
)
SELECT
    concat_ws(' · ', transformation, measures, nullif(form, '')) AS scale,
    transformation, measures, form,
    count(*) AS rows,
    count(*) FILTER (effect > 0) AS positive,
    count(*) FILTER (effect < 0) AS negative,
    min(effect) AS minimum,
    quantile_cont(effect, 0.25) AS lower_quartile,
    median(effect) AS median,
    quantile_cont(effect, 0.75) AS upper_quartile,
    max(effect) AS maximum,
    bool_or(of_baseline) AS is_baseline
FROM sized
GROUP BY transformation, measures, form
ORDER BY min(transformation_position), min(measures_position), form;
