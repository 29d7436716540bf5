-- The view for one sweep, in plan order; finding and axis narrow it where they are given.
SELECT * FROM survival
WHERE sweep = $sweep
    AND ($finding IS NULL OR finding = $finding)
    AND ($axis IS NULL OR axis = $axis)
ORDER BY
    finding,
    list_position(
        ['all', 'lags', 'deterministics', 'window', 'transformation', 'test', 'conditioning',
         'measures'], axis),
    choice_position, code;
