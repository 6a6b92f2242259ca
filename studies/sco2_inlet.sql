-- Questions to the store of studies/sco2_inlet.toml, with this study alone in it:   sqlite3 -box sco2_inlet.sqlite < studies/sco2_inlet.sql
-- High pressure and an asphyxiant: plant is built to local codes by people licensed to do so.

-- 1. What the columns mean.
SELECT column_name, written_as, meaning, unit FROM quantity ORDER BY rowid;

-- 2. The ridge: at each pressure, the temperature where density falls fastest with temperature. (SQLite takes the other columns
--    from the row of the maximum.)
SELECT round(p / 1e5, 2) AS p_bar, round(T - 273.15, 1) AS T_degC, round(rho, 1) AS rho_kg_m3,
       round(max(-drho_dT_at_p), 1) AS fall_kg_m3_per_K, round(cp / 1e3, 1) AS cp_kJ_kgK
FROM sco2_inlet WHERE p > 74e5 AND phase = 'supercritical'
GROUP BY p HAVING round(p / 2.5e4) % 16 = 0 ORDER BY p;

-- 3. The same for cp: near the critical point both ridges run together, above they part.
SELECT round(p / 1e5, 2) AS p_bar, round(T - 273.15, 1) AS T_degC, round(max(cp) / 1e3, 2) AS cp_kJ_kgK, round(rho, 1) AS rho_kg_m3
FROM sco2_inlet WHERE p > 74e5
GROUP BY p HAVING round(p / 2.5e4) % 16 = 0 ORDER BY p;

-- 4. Where an inlet is calm: per pressure, the coolest temperature above the ridge at which one kelvin moves density by less
--    than 2 %.
SELECT round(p / 1e5, 2) AS p_bar, round(min(T) - 273.15, 1) AS calm_above_degC, round(rho, 1) AS rho_kg_m3
FROM sco2_inlet AS state
WHERE abs(drho_dT_at_p) < 0.02 * rho
  AND T > (SELECT T FROM sco2_inlet AS other WHERE other.p = state.p ORDER BY cp DESC LIMIT 1)
  AND round(p / 1e5, 2) IN (76, 80, 84, 88, 92)
GROUP BY p ORDER BY p;

-- 5. Design point 35 degC and 85 bar with an error of 0.5 K and 0.5 bar: what the errors do to density, from the partials alone.
SELECT round(rho, 1) AS rho_kg_m3, round(abs(drho_dT_at_p) * 0.5, 1) AS by_half_a_kelvin, round(drho_dp_at_T * 0.5e5, 1) AS by_half_a_bar,
       round(100 * sqrt(pow(drho_dT_at_p * 0.5, 2) + pow(drho_dp_at_T * 0.5e5, 2)) / rho, 1) AS together_per_cent
FROM sco2_inlet ORDER BY abs(T - 308.15) + abs(p - 85e5) / 1e5 LIMIT 1;

-- 6. Work of the first bar of compression (kJ/kg) at 85 bar: cool and dense against warm and light.
SELECT round(T - 273.15, 1) AS T_degC, round(dh_dp_at_s * 1e5 / 1e3, 4) AS kJ_per_kg_and_bar, round(dT_dp_at_s * 1e5, 3) AS K_per_bar
FROM sco2_inlet WHERE round(p / 1e5, 2) = 85 AND round((T - 273.15) * 5) % 25 = 0 ORDER BY T;

-- 7. What became of the points.
SELECT outcome, phase, count(*) AS points FROM sco2_inlet GROUP BY outcome, phase ORDER BY points DESC;
