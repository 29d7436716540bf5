-- How many rows two sweeps share and how their answers differ.
SELECT
    (SELECT count(*) FROM mine WHERE finding = $mine) AS my_rows,
    (SELECT count(*) FROM theirs WHERE finding = $theirs) AS their_rows,
    count(*) AS shared,
    count(*) FILTER (my_admissible AND their_admissible) AS both_admissible,
    count(*) FILTER (my_admissible AND NOT their_admissible) AS only_mine_admissible,
    count(*) FILTER (their_admissible AND NOT my_admissible) AS only_theirs_admissible,
    count(*) FILTER (my_admissible AND their_admissible AND my_survives AND their_survives)
        AS both_survive,
    count(*) FILTER (my_admissible AND their_admissible AND my_survives AND NOT their_survives)
        AS only_mine_survive,
    count(*) FILTER (my_admissible AND their_admissible AND their_survives AND NOT my_survives)
        AS only_theirs_survive,
    count(*) FILTER (my_admissible AND their_admissible AND NOT my_survives
                     AND NOT their_survives) AS neither_survives,
    count(*) FILTER (my_admissible AND their_admissible AND my_verdict <> their_verdict)
        AS verdict_changed,
    count(*) FILTER (my_admissible IS DISTINCT FROM their_admissible
                     OR (my_admissible AND (my_survives <> their_survives
                                            OR my_verdict <> their_verdict))) AS changed,
    -- Rounding aside: a changed value moves the last digits of windows that it is not in, because
    -- neighbouring windows are standardised together.
    count(*) FILTER (my_admissible AND their_admissible AND abs(my_p - their_p) <= 1e-9
                     AND coalesce(abs(my_reverse_p - their_reverse_p) <= 1e-9,
                                  my_reverse_p IS NULL AND their_reverse_p IS NULL))
        AS same_numbers,
    median(abs(my_p - their_p)) FILTER (my_admissible AND their_admissible) AS median_p_difference,
    max(abs(my_p - their_p)) FILTER (my_admissible AND their_admissible) AS largest_p_difference
FROM pairs;
