-- Verdicts of the rows admissible in both sweeps, one row for each pair of verdicts.
SELECT my_verdict, their_verdict, count(*) AS rows
FROM pairs
WHERE my_admissible AND their_admissible
GROUP BY my_verdict, their_verdict
ORDER BY
    list_position(['one way', 'both ways', 'reverse', 'neither rejected', 'undetermined'],
                  my_verdict),
    list_position(['one way', 'both ways', 'reverse', 'neither rejected', 'undetermined'],
                  their_verdict);
