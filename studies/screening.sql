-- Questions to the store of studies/screening.toml, with this study alone in it:   sqlite3 -box screening.sqlite < studies/screening.sql
-- Safety classes and cautions are the catalogue's; local codes and licensed practice decide what may be used where.

-- Liquid and vapour of a fluid at one temperature side by side, with what the catalogue knows of the fluid. beta is the last axis:
-- the liquid's point stands just before the vapour's.
CREATE TEMP TABLE saturated AS
SELECT vapour.candidate AS fluid, vapour.T AS T, vapour.p AS p, vapour.h - liquid.h AS latent, vapour.rho AS rho,
       vapour.rho * (vapour.h - liquid.h) AS per_volume, vapour.dp_dT_at_sat AS dp_dT, vapour.ds_vap_dT_at_sat AS ds_dT,
       coalesce(safety_class, '-') AS safety_class, fluid.gwp100 AS gwp100, caution
FROM screening AS vapour
JOIN screening AS liquid ON liquid.point = vapour.point - 1
JOIN fluid ON vapour.candidate IN (fluid.designation, fluid.name)
WHERE vapour.beta = 1 AND vapour.rho IS NOT NULL AND liquid.rho IS NOT NULL;

-- 1. Volumetric cooling capacity of dry vapour at 0 degC: which compressor swallows how much.
SELECT fluid, safety_class, gwp100, round(p / 1e5, 2) AS p_bar, round(latent / 1e3, 1) AS latent_kJ_kg,
       round(per_volume / 1e3) AS kJ_per_m3, caution
FROM saturated WHERE round(T, 2) = 273.15 ORDER BY per_volume DESC LIMIT 20;

-- 2. A chiller between -10 and 45 degC: no vacuum, no more than 25 bar, GWP below 150.
SELECT cold.fluid, cold.safety_class, cold.gwp100, round(cold.p / 1e5, 2) AS p_cold_bar, round(warm.p / 1e5, 2) AS p_warm_bar,
       round(warm.p / cold.p, 2) AS ratio, round(cold.per_volume / 1e3) AS kJ_per_m3, cold.caution
FROM saturated AS cold JOIN saturated AS warm USING (fluid)
WHERE round(cold.T, 2) = 263.15 AND round(warm.T, 2) = 318.15 AND cold.p > 1.013e5 AND warm.p < 25e5 AND cold.gwp100 < 150
ORDER BY cold.per_volume DESC;

-- 3. Suction lines: kelvin of saturation temperature lost with 1 kPa of pressure drop at -10 degC. dT/dp = 1 / (dp/dT)_sat.
SELECT fluid, round(1e3 / dp_dT, 3) AS K_per_kPa, round(p / 1e5, 3) AS p_bar
FROM saturated WHERE round(T, 2) = 263.15 ORDER BY 2 DESC LIMIT 15;

-- 4. Power cycles from 120 degC: dry fluids (s'' rises with T) expand without droplets.
SELECT fluid, round(ds_dT, 2) AS ds_dT_J_kgK2, iif(ds_dT > 0, 'dry', 'wet') AS expansion, round(p / 1e5, 2) AS p_bar, safety_class, caution
FROM saturated WHERE round(T, 2) = 393.15 ORDER BY ds_dT DESC;

-- 5. Latent heat by safety class at 0 degC: best, mean, how many.
SELECT safety_class, count(*) AS fluids, round(avg(latent) / 1e3) AS mean_kJ_kg, round(max(latent) / 1e3) AS most_kJ_kg, fluid AS of
FROM saturated WHERE round(T, 2) = 273.15 GROUP BY safety_class ORDER BY 3 DESC;

-- 6. Where a fluid has no saturated state: its range within the study.
SELECT candidate AS fluid, outcome, round(min(T) - 273.15) AS from_degC, round(max(T) - 273.15) AS to_degC, count(*) / 2 AS temperatures
FROM screening WHERE outcome <> 'ok' GROUP BY 1, 2 ORDER BY 1, 3;

-- 7. Fluids that have no liquid at 0 degC: where h and s were fixed in its place.
SELECT fluid, state, round(T, 2) AS T_K, h, s FROM reference_used WHERE state <> 'saturated liquid' ORDER BY fluid;

-- 8. Why columns are missing in good rows.
SELECT DISTINCT column_name, reason FROM absence ORDER BY 1;
