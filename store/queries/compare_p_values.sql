-- p-values of the rows admissible in both sweeps, gathered in cells of a log scale: at most
-- 65 × 65 cells whatever the number of rows.  Values below 0.001 share the first cell.
SELECT
    greatest(ceil(log10(greatest(my_p, 1e-300)) * 20), -64)::INTEGER AS my_cell,
    greatest(ceil(log10(greatest(their_p, 1e-300)) * 20), -64)::INTEGER AS their_cell,
    count(*) AS rows,
    count(*) FILTER (my_survives <> their_survives) AS turned
FROM pairs
WHERE my_admissible AND their_admissible
GROUP BY my_cell, their_cell
ORDER BY my_cell, their_cell;
