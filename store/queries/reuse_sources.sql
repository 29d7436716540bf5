-- How many findings of other sweeps have data and numerics in common with this sweep.
SELECT count(*)
FROM finding AS f
JOIN sweep AS s ON s.sweep = f.sweep
JOIN finding AS g ON g.data_high = f.data_high AND g.data_low = f.data_low
JOIN sweep AS u ON u.sweep = g.sweep AND u.numerics = s.numerics
WHERE f.sweep = $sweep AND g.sweep <> $sweep;
