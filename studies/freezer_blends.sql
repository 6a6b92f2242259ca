-- Questions to the store of studies/freezer_blends.toml, with this study alone in it:   sqlite3 -box freezer_blends.sqlite < studies/freezer_blends.sql
-- The hydrocarbons are highly flammable (A3): local codes and licensed practice decide where and how they may be used.

-- 1. The candidates, and how sure the interactions of their components are.
SELECT label, equation, data_kind FROM candidate ORDER BY id;

-- 2. What became of the points: a point that would split into vapour and liquid has no numbers.
SELECT candidate, outcome, coalesce(phase, '-') AS phase, count(*) AS points FROM freezer_blends GROUP BY 1, 2, 3 ORDER BY 1, 4 DESC;

-- Compositions in words: "R-290 60 %, R-600a 40 %" by mole.
CREATE TEMP TABLE in_words AS
SELECT composition, group_concat(fluid || ' ' || round(100 * z) || ' %', ', ') AS blend
FROM (SELECT composition, fluid, z FROM composition_part WHERE z > 0 ORDER BY composition, ordinal) GROUP BY composition;

-- Volumetric cooling effect, suction at -10 degC and 1 bar, liquid at 24 degC and 15 bar: rho (h_suction - h_liquid).
CREATE TEMP TABLE cooling AS
SELECT suction.composition, suction.rho AS rho, suction.h - liquid.h AS effect, suction.rho * (suction.h - liquid.h) AS per_volume,
       suction.w * suction.w * suction.rho / suction.p AS exponent, suction.dT_dp_at_s * 1e5 AS K_per_bar,
       100 * suction.drho_dT_at_p / suction.rho AS per_cent_per_K, 1e3 * suction.drho_dp_at_T / suction.rho * 100 AS per_cent_per_kPa
FROM points_freezer_blends AS suction JOIN points_freezer_blends AS liquid USING (composition)
WHERE round(suction.T, 2) = 263.15 AND suction.p = 1e5 AND suction.rho < 20
  AND round(liquid.T, 2) = 297.15 AND liquid.p = 15e5 AND liquid.rho > 300;

-- 3. Capacity of the same compressor against R-404A: the ten blends with the most, and R-404A itself.
SELECT blend, round(rho, 3) AS rho_kg_m3, round(effect / 1e3, 1) AS kJ_per_kg, round(per_volume / 1e3) AS kJ_per_m3,
       round(100 * per_volume / (SELECT per_volume FROM cooling JOIN composition ON composition.id = cooling.composition
                                 JOIN candidate ON candidate.id = composition.candidate WHERE label = 'R-404A')) AS per_cent_of_R404A
FROM cooling JOIN in_words USING (composition) ORDER BY per_volume DESC LIMIT 10;

-- 4. What isobutane costs: capacity and heating by compression along the binary R-290/R-600a.
SELECT blend, round(per_volume / 1e3) AS kJ_per_m3, round(exponent, 3) AS isentropic_exponent, round(K_per_bar, 1) AS K_per_bar
FROM cooling JOIN in_words USING (composition)
WHERE blend NOT LIKE '%R-1270%' AND blend NOT LIKE '%R-125%' ORDER BY per_volume DESC;

-- 5. How much density a kelvin of superheat and a kilopascal of suction line cost.
SELECT blend, round(per_cent_per_K, 3) AS per_cent_per_K, round(per_cent_per_kPa, 3) AS per_cent_per_kPa
FROM cooling JOIN in_words USING (composition) WHERE blend LIKE '%R-125%' OR blend LIKE '%100.0%' ORDER BY blend;

-- 6. Suction pressures at which every lattice composition is one-phase vapour at -10 degC.
SELECT p / 1e5 AS p_bar, sum(phase = 'vapour') AS vapour, sum(outcome = 'splits') AS splits, sum(phase = 'liquid') AS liquid
FROM freezer_blends WHERE round(T, 2) = 263.15 AND candidate <> 'R-404A' GROUP BY p ORDER BY p;

-- 7. GWP of the compositions (by mass; NULL where a component was not assessed).
SELECT label, min(gwp100) AS least, max(gwp100) AS most, count(*) AS compositions, sum(gwp100 IS NULL) AS not_assessed
FROM composition JOIN candidate ON candidate.id = composition.candidate GROUP BY label;
