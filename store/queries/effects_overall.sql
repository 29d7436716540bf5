-- The two quantities that may be compared across scales, over all admissible planned rows.
WITH sized AS (
    SELECT 'signed partial R²' AS quantity, signed_partial_r2 * orientation AS effect
    FROM judged
    WHERE sweep = $sweep AND finding = $finding AND request = 0 AND admissible
    UNION ALL
    SELECT 'standardised sum', standardised_sum * orientation
    FROM judged
    WHERE sweep = $sweep AND finding = $finding AND request = 0 AND admissible
)
SELECT
    quantity,
    count(*) AS rows,
    count(*) FILTER (effect > 0) AS positive,
    count(*) FILTER (effect < 0) AS negative,
    min(effect) AS minimum,
    quantile_cont(effect, 0.25) AS lower_quartile,
    median(effect) AS median,
    quantile_cont(effect, 0.75) AS upper_quartile,
    max(effect) AS maximum
FROM sized
WHERE effect IS NOT NULL
GROUP BY quantity
ORDER BY quantity;
