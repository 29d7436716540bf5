-- One row for each outcome, judged by its sweep's rules and its finding's claim.
-- The only place where admissible, survives and verdict are defined.
--
-- A claim is two tests of p-values against the level a and one of signs:
--     holds_from <= a < holds_below   and   sign_holds
--     leads             p_f <= a                  holds_from p_f            holds_below 2 (never)
--     leads one way     p_f <= a and p_r > a      holds_from p_f            holds_below p_r
--     leads both ways   p_f <= a and p_r <= a     holds_from max(p_f, p_r)  holds_below 2 (never)
--     does not lead     p_f > a                   holds_from -1 (always)    holds_below p_f
-- so the same two numbers serve every level.
CREATE VIEW judged AS
WITH rules AS (
    SELECT
        f.sweep, f.finding, s.significance AS level, f.required_mask,
        CASE WHEN f.claim = 'does not lead' THEN 0 ELSE f.sign END AS claimed_sign,
        CASE WHEN f.claim = 'leads both ways' THEN f.reverse_sign ELSE 0 END AS claimed_reverse_sign,
        f.claim = 'leads one way' AS one_way,
        f.claim = 'leads both ways' AS both_ways,
        f.claim = 'does not lead' AS no_lead,
        f.baseline_high, f.baseline_low, f.baseline_weight
    FROM finding AS f
    JOIN sweep AS s ON s.sweep = f.sweep
),
turned AS (
    SELECT sweep, finding, code, orientation FROM sweep_choice WHERE axis = 'measures'
),
window_weight AS (
    SELECT sweep, finding, code, weight FROM sweep_choice WHERE axis = 'window'
),
test_weight AS (
    SELECT sweep, finding, code, weight FROM sweep_choice WHERE axis = 'test'
),
prepared AS (
    SELECT
        o.*, r.level, r.required_mask, m.orientation,
        w.weight * t.weight * CASE
            WHEN o.spec_high = r.baseline_high AND o.spec_low = r.baseline_low
            THEN r.baseline_weight ELSE 1 END AS weight,
        -- The two-way claims need both directions; the worse of the two statuses counts.
        CASE WHEN r.one_way OR r.both_ways THEN greatest(o.status, o.reverse_status)
             ELSE o.status END AS run_status,
        CASE WHEN r.one_way OR r.both_ways THEN o.failed_mask | o.reverse_failed_mask
             ELSE o.failed_mask END AS counted_mask,
        -- A test that gives no sign cannot speak for a claim with one.
        (r.claimed_sign <> 0 AND o.coefficient_sum IS NULL)
            OR (r.claimed_reverse_sign <> 0 AND o.reverse_coefficient_sum IS NULL) AS signless,
        coalesce(
            (r.claimed_sign = 0 OR sign(o.coefficient_sum) * m.orientation = r.claimed_sign)
            AND (r.claimed_reverse_sign = 0
                 OR sign(o.reverse_coefficient_sum) * m.orientation = r.claimed_reverse_sign),
            FALSE) AS sign_holds,
        CASE WHEN r.no_lead THEN -1
             WHEN r.both_ways THEN greatest(o.p_value, o.reverse_p_value)
             ELSE o.p_value END AS holds_from,
        CASE WHEN r.no_lead THEN o.p_value
             WHEN r.one_way THEN o.reverse_p_value
             ELSE 2 END AS holds_below
    FROM outcome AS o
    JOIN rules AS r ON r.sweep = o.sweep AND r.finding = o.finding
    JOIN turned AS m ON m.sweep = o.sweep AND m.finding = o.finding AND m.code = o.measures
    JOIN window_weight AS w ON w.sweep = o.sweep AND w.finding = o.finding AND w.code = o."window"
    JOIN test_weight AS t ON t.sweep = o.sweep AND t.finding = o.finding AND t.code = o.test
),
counted AS (
    SELECT
        *,
        CASE WHEN run_status = 0 AND signless THEN 1 ELSE run_status END AS counted_status,
        run_status = 0 AND signless AS lacks_sign,
        (counted_mask & required_mask) <> 0 AS screens_failed
    FROM prepared
)
SELECT
    * EXCLUDE (run_status, signless, screens_failed),
    counted_status = 0 AND NOT screens_failed AS admissible,
    counted_status = 0 AND screens_failed AS screened_out,
    CASE WHEN counted_status = 0
         THEN sign_holds AND holds_from <= level AND level < holds_below END AS survives,
    counted_status = 0 AND NOT sign_holds
        AND holds_from <= level AND level < holds_below AS other_sign,
    -- Signs aside, and whatever the claim.
    CASE WHEN status <> 0 OR reverse_status <> 0 THEN 'undetermined'
         WHEN p_value <= level AND reverse_p_value <= level THEN 'both ways'
         WHEN p_value <= level THEN 'one way'
         WHEN reverse_p_value <= level THEN 'reverse'
         ELSE 'neither rejected' END AS verdict
FROM counted;
