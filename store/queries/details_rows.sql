-- Details of one specification.
SELECT kind, position, date, value, standard_error, p_value, critical_value
FROM details
WHERE sweep = $sweep AND finding = $finding AND spec_high = $high AND spec_low = $low
ORDER BY kind, position, date;
