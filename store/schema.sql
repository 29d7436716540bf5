-- Tables of a store.  Append-only: no keys, no indexes, no defaults; NULL and a status, never NaN.
-- Created at DuckDB storage version v1.0.0, so that every DuckDB 1.x can read the file.
-- The views built on these tables are in queries/: judged, outcomes, survival.

CREATE TABLE meta (
    schema_version INTEGER,  -- version of this file's tables and views; another version is refused
    created TIMESTAMP,  -- when the store was created, universal time
    crosswind VARCHAR,  -- version of the program that created it
    duckdb VARCHAR  -- version of DuckDB that created it
);

CREATE TABLE event (
    happened TIMESTAMP,  -- universal time
    sweep INTEGER,  -- sweep it belongs to; NULL for the store as a whole
    kind VARCHAR,  -- begun, resumed, finished, or what the caller of log() named
    text VARCHAR  -- words, or JSON for finished (wall_seconds and counts)
);

CREATE TABLE sweep (
    sweep INTEGER,  -- number of the sweep in this store, from 1
    plan_digest VARCHAR,  -- digest of the plan in canonical form
    plan_toml VARCHAR,  -- the plan file as it was read
    title VARCHAR,  -- title of the plan
    seed BIGINT,  -- seed of everything random
    significance DOUBLE,  -- stated level, in (0, 1)
    numerics VARCHAR,  -- versions of the numerical rules; rows are shared only where it is equal
    design VARCHAR,  -- full, one change, two changes, or a sample and its size
    data_note VARCHAR,  -- JSON: file, source, digest, frequency, span
    versions VARCHAR,  -- JSON: program, interpreter and libraries
    started TIMESTAMP  -- universal time
);

CREATE TABLE finding (
    sweep INTEGER,  -- sweep
    finding SMALLINT,  -- number of the finding in its sweep, plan order
    name VARCHAR,  -- the author's name for it
    cause VARCHAR,  -- role of the series said to lead
    effect VARCHAR,  -- role of the series said to follow
    given VARCHAR,  -- series conditioned on, joined by ", "
    exogenous VARCHAR,  -- regressors that are not modelled, joined by ", "
    claim VARCHAR,  -- leads, leads one way, leads both ways, does not lead
    sign TINYINT,  -- claimed sign of the effect: 1, -1, or 0 for none
    reverse_sign TINYINT,  -- claimed sign of the reverse under leads both ways; 0 for none
    data_high UBIGINT,  -- digest of frequency, dates and values of its series, upper half
    data_low UBIGINT,  -- the same, lower half
    required_mask INTEGER,  -- bits of the screens that an admissible row must pass
    baseline_high UBIGINT,  -- specification of the baseline, upper half
    baseline_low UBIGINT,  -- the same, lower half
    reported_statistic VARCHAR,  -- printed statistic of the baseline, in its digits; NULL where not given
    reported_p_value VARCHAR,  -- printed p-value, in its digits; NULL where not given
    reported_observations DOUBLE,  -- printed number of observations; NULL where not given
    reported_tolerance DOUBLE,  -- difference allowed in both; NULL for half a last digit of each
    planned INTEGER,  -- rows that the plan asks for, those that requests add aside
    added INTEGER,  -- rows that requests add
    baseline_weight DOUBLE  -- factor of the weight of the baseline's row; 1 unless rows were drawn
);

CREATE TABLE choice (
    axis VARCHAR,  -- lags, deterministics, window, transformation, test, conditioning, measures
    code SMALLINT,  -- number within the axis; codes of a store only grow
    token_high UBIGINT,  -- digest of the choice's meaning, upper half
    token_low UBIGINT,  -- the same, lower half
    label VARCHAR,  -- words of the plan that first used it
    meaning VARCHAR  -- canonical JSON that the token digests
);

CREATE TABLE sweep_choice (
    sweep INTEGER,  -- sweep
    finding SMALLINT,  -- finding
    axis VARCHAR,  -- axis
    code SMALLINT,  -- code in choice
    label VARCHAR,  -- words of this sweep's plan
    because VARCHAR,  -- the author's reason for the choice; empty where none was given
    is_baseline BOOLEAN,  -- true for the choice that the baseline makes
    position INTEGER,  -- place on the axis, plan order
    weight DOUBLE,  -- part of the headline weight: 1/positions (window), 1/group size (test), else 1
    orientation TINYINT,  -- 1, or -1 where an inverted measure turns the sign of the effect
    entry_kind VARCHAR,  -- rolling, expanding or shrinking for a moving window; empty otherwise
    positions INTEGER,  -- planned positions of a moving window; 1 otherwise
    scale_group VARCHAR,  -- choices whose coefficients are on one scale share it
    length INTEGER,  -- periods in a moving window, the shortest if it grows; 0 otherwise
    request SMALLINT,  -- 0 for a choice of the plan, otherwise the request that first brought it
    data_high UBIGINT,  -- measures: digest of dates and values of their series, upper half; else 0
    data_low UBIGINT,  -- the same, lower half
    planned INTEGER  -- rows of the plan that make the choice, those that requests add aside
);

CREATE TABLE window_position (
    sweep INTEGER,  -- sweep
    finding SMALLINT,  -- finding
    "window" SMALLINT,  -- code of the window choice
    position INTEGER,  -- number of the position within the entry, in order of time
    window_start DATE,  -- first observation of the window, before lags are taken
    window_end DATE  -- last observation of the window
);

CREATE TABLE reason (
    code SMALLINT,  -- number, from 1; 0 in outcome stands for no reason
    status TINYINT,  -- status that it explains: 1 not applicable, 2 infeasible, 3 failed
    text VARCHAR,  -- words for people
    ruled BOOLEAN  -- true where the plan's author ruled the combination out
);

CREATE TABLE screen (
    bit SMALLINT,  -- bit in the masks, from 0
    name VARCHAR  -- name of the screen
);

CREATE TABLE request (
    sweep INTEGER,  -- sweep
    request SMALLINT,  -- number of the request, from 1; 0 in outcome stands for planned
    name VARCHAR,  -- name of the request
    asked_by VARCHAR,  -- who asked
    asks VARCHAR  -- the question in words
);

CREATE TABLE request_choice (
    sweep INTEGER,  -- sweep
    finding SMALLINT,  -- finding
    request SMALLINT,  -- number of the request
    axis VARCHAR,  -- axis
    code SMALLINT,  -- a choice that the request names, planned or new
    position INTEGER  -- place in the request
);

CREATE TABLE outcome (
    sweep INTEGER,  -- sweep
    finding SMALLINT,  -- finding
    spec_high UBIGINT,  -- specification, upper half
    spec_low UBIGINT,  -- the same, lower half
    computation UBIGINT,  -- digest of what was really computed; 0 where nothing was
    request SMALLINT,  -- 0 planned, otherwise the request that first asked for the row
    lags SMALLINT,  -- code of the lag choice
    deterministics SMALLINT,  -- code of the deterministic terms
    "window" SMALLINT,  -- code of the window choice
    position INTEGER,  -- position of a moving window; 0 for a fixed one
    transformation SMALLINT,  -- code of the transformation
    test SMALLINT,  -- code of the test entry
    conditioning SMALLINT,  -- code of the conditioning choice
    measures SMALLINT,  -- code of the measures
    order_used SMALLINT,  -- lag order of the cause, in periods; NULL where nothing was estimated
    observations INTEGER,  -- rows in the regression; NULL where nothing was estimated
    statistic DOUBLE,  -- statistic of cause to effect
    df_num SMALLINT,  -- restrictions; NULL where nothing was estimated
    df_den INTEGER,  -- denominator degrees of freedom; NULL for a chi-square reference
    p_value DOUBLE,  -- p-value of cause to effect, in [0, 1]
    coefficient_sum DOUBLE,  -- sum of the tested lag coefficients, units of effect per unit of cause
    coefficient_sum_se DOUBLE,  -- its standard error, same units
    signed_partial_r2 DOUBLE,  -- partial R-squared of the cause's lags with the sign of the sum
    standardised_sum DOUBLE,  -- the sum in standard deviations of effect per one of cause
    reverse_statistic DOUBLE,  -- statistic of effect to cause
    reverse_p_value DOUBLE,  -- p-value of effect to cause, in [0, 1]
    reverse_coefficient_sum DOUBLE,  -- sum of the reverse lag coefficients, cause per unit of effect
    status TINYINT,  -- 0 ok, 1 not applicable, 2 infeasible, 3 failed
    reverse_status TINYINT,  -- the same for the reverse direction
    reason SMALLINT,  -- code in reason; 0 for none
    solver TINYINT,  -- 0 none, 1 cholesky, 2 qr, 3 library
    failed_mask INTEGER,  -- bits of the screens failed by the system or the effect's equation
    reverse_failed_mask INTEGER  -- bits of the screens failed by the cause's equation
);

CREATE TABLE details (
    sweep INTEGER,  -- sweep
    finding SMALLINT,  -- finding
    spec_high UBIGINT,  -- specification, upper half
    spec_low UBIGINT,  -- the same, lower half
    kind VARCHAR,  -- lag coefficient, reverse lag coefficient
    position INTEGER,  -- lag in periods
    date DATE,  -- date of the entry, for paths over time; NULL otherwise
    value DOUBLE,  -- the number, in the units of its kind
    standard_error DOUBLE,  -- its standard error; NULL where there is none
    p_value DOUBLE,  -- p-value of the entry alone; NULL where there is none
    critical_value DOUBLE  -- bound it is held against; NULL where there is none
);
