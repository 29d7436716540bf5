-- How many choices of measures have data and numerics in common with other sweeps.
SELECT count(*)
FROM sweep_choice AS f
JOIN sweep AS s ON s.sweep = f.sweep
JOIN sweep_choice AS g
    ON g.axis = 'measures' AND g.code = f.code
    AND g.data_high = f.data_high AND g.data_low = f.data_low
JOIN sweep AS u ON u.sweep = g.sweep AND u.numerics = s.numerics
WHERE f.axis = 'measures' AND f.sweep = $sweep AND g.sweep <> $sweep;
