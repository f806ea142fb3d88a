-- What somebody with a SQLite shell reads a number's way by: which tag is what of which train,
-- as the plant file has it, and views in which readings and rows stand in SI or in the units of
-- the trade. Open a backup with the shell, never the live file.

-- Tags by train and role, from the plant file last read, which replaces all of them.
CREATE TABLE train_tag (
    plant       TEXT NOT NULL,
    train       TEXT NOT NULL,
    role        TEXT NOT NULL,
    source      TEXT NOT NULL,
    tag         TEXT NOT NULL,
    from_us     INTEGER NOT NULL,           -- the least integer there is: always
    to_us       INTEGER NOT NULL,           -- the greatest there is: still
    factor      REAL NOT NULL,
    "offset"    REAL NOT NULL,              -- value * factor + offset is SI, or degrees Celsius
    pressure    TEXT CHECK (pressure IN ('gauge', 'absolute', 'vacuum')),
    elevation_m REAL NOT NULL,              -- of the gauge above the train's common level
    -- value * gain + shift is SI, with pressures brought to gauge and to the common level.
    gain        REAL NOT NULL GENERATED ALWAYS AS (
        CASE pressure WHEN 'vacuum' THEN -factor ELSE factor END
    ) STORED,
    shift       REAL NOT NULL GENERATED ALWAYS AS (
        CASE pressure
            WHEN 'vacuum' THEN -"offset"
            WHEN 'absolute' THEN "offset" - 101325.0
            ELSE "offset"
        END + CASE WHEN pressure IS NULL THEN 0.0 ELSE 999.0 * 9.80665 * elevation_m END
    ) STORED,
    -- Place in the view "minute"; NULL for a role that has none in it.
    part        INTEGER GENERATED ALWAYS AS (
        CASE role
            WHEN 'feed_pressure' THEN 1
            WHEN 'permeate_pressure' THEN 2
            WHEN 'transmembrane_pressure' THEN 3
            WHEN 'temperature' THEN 4
            WHEN 'permeate_flow' THEN 5
            WHEN 'state' THEN 6
        END
    ) STORED,
    PRIMARY KEY (plant, train, role, from_us)
) STRICT, WITHOUT ROWID;

-- Membrane area in service.
CREATE TABLE train_area (
    plant   TEXT NOT NULL,
    train   TEXT NOT NULL,
    from_us INTEGER NOT NULL,
    to_us   INTEGER NOT NULL,
    area_m2 REAL NOT NULL,
    PRIMARY KEY (plant, train, from_us)
) STRICT, WITHOUT ROWID;

-- What the codes of a state tag mean.
CREATE TABLE train_state (
    plant   TEXT NOT NULL,
    train   TEXT NOT NULL,
    code    TEXT NOT NULL COLLATE NOCASE,
    from_us INTEGER NOT NULL,
    to_us   INTEGER NOT NULL,
    phase   TEXT NOT NULL,
    PRIMARY KEY (plant, train, code, from_us)
) STRICT, WITHOUT ROWID;

-- Viscosity of water at 0.1 MPa by tenths of a degree, after IAPWS SR6-08(2011): the SQLite
-- linked in has no powers. Interpolated in a straight line it is within 2e-6 of the formula.
CREATE TABLE viscosity (
    tenths         INTEGER PRIMARY KEY,     -- of a degree Celsius
    viscosity_pa_s REAL NOT NULL,
    step_pa_s      REAL NOT NULL DEFAULT 0  -- from here to the next row
) STRICT;

-- Readings by train, one a row, in the export's unit and in SI. Name plant, train and day (UTC,
-- days since 1970) in the WHERE clause: they reach the key of reading_chunk because every window
-- below partitions by them. A bound on time_us alone reads everything there is.
CREATE VIEW train_reading AS
SELECT
    plant, train, day, part,
    CASE part
        WHEN 1 THEN 'feed_pressure'
        WHEN 2 THEN 'permeate_pressure'
        WHEN 3 THEN 'transmembrane_pressure'
        WHEN 4 THEN 'temperature'
        WHEN 5 THEN 'permeate_flow'
        WHEN 6 THEN 'state'
    END AS role,
    time_us,
    value, -- a number or a word; NULL where it was marked bad
    CASE WHEN typeof(value) = 'real' AND part < 6 THEN value * gain + shift END AS value_si
FROM (
    SELECT
        plant, train, day, part, from_us, to_us, gain, shift,
        start_us + coalesce(sum(delta_us) OVER so_far, 0) AS time_us,
        coalesce(CASE WHEN step IS NOT NULL THEN sum(step) OVER so_far END / scale, other) AS value
    FROM (
        -- As in "reading", whatever needs the text of a chunk is taken out of it here.
        SELECT
            t.plant, t.train, c.day, t.part, t.from_us, t.to_us, t.gain, t.shift,
            v.key AS place,
            c.first_us + v.key * coalesce(c.content ->> '$.step', 0) AS start_us,
            CASE WHEN c.content ->> '$.step' IS NULL
                THEN (c.content ->> ('$.dt[' || v.key || ']')) * (c.content ->> '$.tick')
            END AS delta_us,
            (c.content ->> '$.scale') * 1.0 AS scale,
            CASE v.type WHEN 'integer' THEN v.value END AS step,
            CASE
                WHEN v.type = 'real' THEN v.value
                WHEN v.type = 'text' AND v.value LIKE 'w%'
                    THEN c.content ->> ('$.words[' || substr(v.value, 2) || ']')
                WHEN v.type = 'integer' AND c.content ->> '$.scale' IS NULL
                    THEN c.content ->> ('$.words[' || v.value || ']')
            END AS other
        -- CROSS JOIN keeps the order of the loops.
        FROM train_tag AS t
            CROSS JOIN reading_chunk AS c
            CROSS JOIN json_each(c.content, '$.v') AS v
        WHERE c.plant = t.plant AND c.source = t.source AND c.tag = t.tag
            AND c.day BETWEEN t.from_us / 86400000000 - 1 AND t.to_us / 86400000000
            AND t.part IS NOT NULL AND v.type <> 'null'
    )
    WINDOW so_far AS (
        PARTITION BY plant, train, day, part, from_us ORDER BY place ROWS UNBOUNDED PRECEDING
    )
)
WHERE time_us >= from_us AND time_us < to_us;

-- Raw readings of a train side by side, normalised minute by minute: nothing is left out for
-- being unsteady, and no value stands in for the next. A row is a time at which the flow or the
-- state was read; a temperature of the same minute is joined to it. Viscosity is that of water,
-- whatever temperature law the plant file names. Name plant, train and day in the WHERE clause.
CREATE VIEW minute AS
SELECT
    m.plant, m.train, m.day, m.time_us,
    m.feed_pressure_pa, m.permeate_pressure_pa, m.tmp_pa,
    m.flow_m3_s,
    m.flow_m3_s / a.area_m2 AS flux_m_s,
    m.temperature_degc,
    m.state, -- as the export has it
    (
        SELECT phase FROM train_state AS s
        WHERE s.plant = m.plant AND s.train = m.train AND s.code = trim(m.state)
            AND s.from_us <= m.time_us AND s.to_us > m.time_us
    ) AS phase,
    v.viscosity_pa_s + (m.temperature_degc * 10 - v.tenths) * v.step_pa_s AS viscosity_pa_s,
    CASE WHEN m.flow_m3_s > 0 THEN
        m.tmp_pa * a.area_m2 / m.flow_m3_s
            / (v.viscosity_pa_s + (m.temperature_degc * 10 - v.tenths) * v.step_pa_s)
    END AS resistance_1_m,
    CASE WHEN m.flow_m3_s > 0 THEN
        m.flow_m3_s / a.area_m2 / m.tmp_pa
            * (v.viscosity_pa_s + (m.temperature_degc * 10 - v.tenths) * v.step_pa_s)
            / (SELECT viscosity_pa_s FROM viscosity WHERE tenths = 200)
    END AS permeability_20_m_s_pa -- at 20 degrees Celsius
FROM (
    SELECT
        plant, train, day, time_us, part, feed_pressure_pa, permeate_pressure_pa, flow_m3_s,
        -- The controller's own TMP counts where the train has no pressures.
        CASE
            WHEN own_tmp_pa IS NULL OR EXISTS (
                SELECT 1 FROM train_tag AS t
                WHERE t.plant = w.plant AND t.train = w.train AND t.role = 'feed_pressure'
            ) THEN feed_pressure_pa - permeate_pressure_pa
            ELSE own_tmp_pa
        END AS tmp_pa,
        coalesce(temperature_degc, avg(temperature_degc) OVER same_minute) AS temperature_degc,
        CASE typeof(state) WHEN 'real' THEN format('%.15g', state) ELSE state END AS state
    FROM (
        SELECT
            plant, train, day, time_us, part,
            max(part) OVER at_once AS last_part,
            max(value_si) FILTER (WHERE part = 1) OVER at_once AS feed_pressure_pa,
            max(value_si) FILTER (WHERE part = 2) OVER at_once AS permeate_pressure_pa,
            max(value_si) FILTER (WHERE part = 3) OVER at_once AS own_tmp_pa,
            max(value_si) FILTER (WHERE part = 4) OVER at_once AS temperature_degc,
            max(value_si) FILTER (WHERE part = 5) OVER at_once AS flow_m3_s,
            max(value) FILTER (WHERE part = 6) OVER at_once AS state
        FROM train_reading
        WINDOW at_once AS (PARTITION BY plant, train, day, time_us)
    ) AS w
    -- One row of each time.
    WHERE part = last_part
    WINDOW same_minute AS (PARTITION BY plant, train, day, time_us / 60000000)
) AS m
    LEFT JOIN train_area AS a ON a.plant = m.plant AND a.train = m.train
        AND a.from_us <= m.time_us AND a.to_us > m.time_us
    LEFT JOIN viscosity AS v ON v.tenths = CAST(m.temperature_degc * 10 AS INTEGER)
        AND m.temperature_degc BETWEEN 0 AND 60
-- Where only a pressure or a temperature was read there is nothing to normalise.
WHERE m.part IN (5, 6);

-- Hours in the units of the trade; permeability at 20 degrees Celsius.
CREATE VIEW hour_units AS
SELECT
    plant, train,
    strftime('%Y-%m-%dT%H:%M:%SZ', start_us / 1000000, 'unixepoch') AS start_utc,
    start_us,
    3.6e11 / (resistance_1_m * r.viscosity_pa_s) AS permeability_l_m2_h_bar,
    3.6e11 / (start_resistance_1_m * r.viscosity_pa_s) AS start_permeability_l_m2_h_bar,
    flux_m_s * 3.6e6 AS flux_l_m2_h,
    tmp_pa / 1e5 AS tmp_bar,
    end_tmp_max_pa / 1e5 AS end_tmp_max_bar,
    temperature_degc,
    filtration_s / 60 AS filtration_min,
    mostly, quality, reasons
FROM hour LEFT JOIN viscosity AS r ON r.tenths = 200;

-- Plant days in the units of the trade; permeability at 20 degrees Celsius.
CREATE VIEW day_units AS
SELECT
    plant, train,
    strftime('%Y-%m-%dT%H:%M:%SZ', start_us / 1000000, 'unixepoch') AS start_utc,
    start_us,
    3.6e11 / (resistance_1_m * r.viscosity_pa_s) AS start_permeability_l_m2_h_bar,
    3.6e11 / (steady_resistance_1_m * r.viscosity_pa_s) AS permeability_l_m2_h_bar,
    flux_m_s * 3.6e6 AS flux_l_m2_h,
    end_tmp_pa / 1e5 AS end_tmp_bar,
    end_tmp_max_pa / 1e5 AS end_tmp_max_bar,
    temperature_degc,
    filtration_s / 3600 AS filtration_h,
    volume_m * 1000 AS filtered_l_m2,
    coverage, cycles, cycles_left_out, quality, reasons
FROM day LEFT JOIN viscosity AS r ON r.tenths = 200;

INSERT INTO viscosity (tenths, viscosity_pa_s) VALUES
    (0, 1.791782430e-3), (1, 1.785557006e-3), (2, 1.779366095e-3), (3, 1.773209435e-3),
    (4, 1.767086769e-3), (5, 1.760997841e-3), (6, 1.754942398e-3), (7, 1.748920189e-3),
    (8, 1.742930965e-3), (9, 1.736974482e-3), (10, 1.731050494e-3), (11, 1.725158761e-3),
    (12, 1.719299043e-3), (13, 1.713471104e-3), (14, 1.707674708e-3), (15, 1.701909622e-3),
    (16, 1.696175617e-3), (17, 1.690472465e-3), (18, 1.684799938e-3), (19, 1.679157813e-3),
    (20, 1.673545867e-3), (21, 1.667963882e-3), (22, 1.662411638e-3), (23, 1.656888921e-3),
    (24, 1.651395515e-3), (25, 1.645931209e-3), (26, 1.640495792e-3), (27, 1.635089057e-3),
    (28, 1.629710798e-3), (29, 1.624360809e-3), (30, 1.619038888e-3), (31, 1.613744834e-3),
    (32, 1.608478449e-3), (33, 1.603239535e-3), (34, 1.598027897e-3), (35, 1.592843341e-3),
    (36, 1.587685676e-3), (37, 1.582554711e-3), (38, 1.577450257e-3), (39, 1.572372128e-3),
    (40, 1.567320139e-3), (41, 1.562294106e-3), (42, 1.557293847e-3), (43, 1.552319182e-3),
    (44, 1.547369932e-3), (45, 1.542445920e-3), (46, 1.537546971e-3), (47, 1.532672910e-3),
    (48, 1.527823566e-3), (49, 1.522998766e-3), (50, 1.518198342e-3), (51, 1.513422125e-3),
    (52, 1.508669949e-3), (53, 1.503941649e-3), (54, 1.499237062e-3), (55, 1.494556023e-3),
    (56, 1.489898374e-3), (57, 1.485263955e-3), (58, 1.480652606e-3), (59, 1.476064172e-3),
    (60, 1.471498498e-3), (61, 1.466955428e-3), (62, 1.462434811e-3), (63, 1.457936495e-3),
    (64, 1.453460329e-3), (65, 1.449006165e-3), (66, 1.444573855e-3), (67, 1.440163253e-3),
    (68, 1.435774213e-3), (69, 1.431406592e-3), (70, 1.427060247e-3), (71, 1.422735037e-3),
    (72, 1.418430820e-3), (73, 1.414147459e-3), (74, 1.409884814e-3), (75, 1.405642750e-3),
    (76, 1.401421130e-3), (77, 1.397219820e-3), (78, 1.393038686e-3), (79, 1.388877596e-3),
    (80, 1.384736420e-3), (81, 1.380615026e-3), (82, 1.376513285e-3), (83, 1.372431070e-3),
    (84, 1.368368254e-3), (85, 1.364324711e-3), (86, 1.360300315e-3), (87, 1.356294943e-3),
    (88, 1.352308473e-3), (89, 1.348340781e-3), (90, 1.344391748e-3), (91, 1.340461254e-3),
    (92, 1.336549179e-3), (93, 1.332655405e-3), (94, 1.328779817e-3), (95, 1.324922296e-3),
    (96, 1.321082730e-3), (97, 1.317261002e-3), (98, 1.313457001e-3), (99, 1.309670613e-3),
    (100, 1.305901728e-3), (101, 1.302150234e-3), (102, 1.298416022e-3), (103, 1.294698983e-3),
    (104, 1.290999009e-3), (105, 1.287315994e-3), (106, 1.283649830e-3), (107, 1.280000413e-3),
    (108, 1.276367638e-3), (109, 1.272751400e-3), (110, 1.269151598e-3), (111, 1.265568129e-3),
    (112, 1.262000892e-3), (113, 1.258449786e-3), (114, 1.254914712e-3), (115, 1.251395570e-3),
    (116, 1.247892263e-3), (117, 1.244404693e-3), (118, 1.240932763e-3), (119, 1.237476377e-3),
    (120, 1.234035441e-3), (121, 1.230609859e-3), (122, 1.227199539e-3), (123, 1.223804386e-3),
    (124, 1.220424310e-3), (125, 1.217059218e-3), (126, 1.213709019e-3), (127, 1.210373624e-3),
    (128, 1.207052943e-3), (129, 1.203746886e-3), (130, 1.200455367e-3), (131, 1.197178298e-3),
    (132, 1.193915591e-3), (133, 1.190667161e-3), (134, 1.187432922e-3), (135, 1.184212789e-3),
    (136, 1.181006679e-3), (137, 1.177814507e-3), (138, 1.174636192e-3), (139, 1.171471650e-3),
    (140, 1.168320800e-3), (141, 1.165183560e-3), (142, 1.162059852e-3), (143, 1.158949593e-3),
    (144, 1.155852707e-3), (145, 1.152769112e-3), (146, 1.149698733e-3), (147, 1.146641491e-3),
    (148, 1.143597308e-3), (149, 1.140566110e-3), (150, 1.137547820e-3), (151, 1.134542363e-3),
    (152, 1.131549664e-3), (153, 1.128569649e-3), (154, 1.125602245e-3), (155, 1.122647378e-3),
    (156, 1.119704977e-3), (157, 1.116774968e-3), (158, 1.113857282e-3), (159, 1.110951845e-3),
    (160, 1.108058590e-3), (161, 1.105177444e-3), (162, 1.102308340e-3), (163, 1.099451208e-3),
    (164, 1.096605980e-3), (165, 1.093772588e-3), (166, 1.090950965e-3), (167, 1.088141043e-3),
    (168, 1.085342756e-3), (169, 1.082556039e-3), (170, 1.079780825e-3), (171, 1.077017051e-3),
    (172, 1.074264650e-3), (173, 1.071523560e-3), (174, 1.068793717e-3), (175, 1.066075057e-3),
    (176, 1.063367518e-3), (177, 1.060671037e-3), (178, 1.057985553e-3), (179, 1.055311004e-3),
    (180, 1.052647329e-3), (181, 1.049994468e-3), (182, 1.047352361e-3), (183, 1.044720948e-3),
    (184, 1.042100170e-3), (185, 1.039489967e-3), (186, 1.036890282e-3), (187, 1.034301057e-3),
    (188, 1.031722233e-3), (189, 1.029153754e-3), (190, 1.026595563e-3), (191, 1.024047603e-3),
    (192, 1.021509819e-3), (193, 1.018982155e-3), (194, 1.016464555e-3), (195, 1.013956964e-3),
    (196, 1.011459329e-3), (197, 1.008971595e-3), (198, 1.006493709e-3), (199, 1.004025616e-3),
    (200, 1.001567265e-3), (201, 9.991186014e-4), (202, 9.966795742e-4), (203, 9.942501313e-4),
    (204, 9.918302209e-4), (205, 9.894197920e-4), (206, 9.870187936e-4), (207, 9.846271753e-4),
    (208, 9.822448868e-4), (209, 9.798718784e-4), (210, 9.775081005e-4), (211, 9.751535040e-4),
    (212, 9.728080401e-4), (213, 9.704716603e-4), (214, 9.681443165e-4), (215, 9.658259607e-4),
    (216, 9.635165454e-4), (217, 9.612160235e-4), (218, 9.589243481e-4), (219, 9.566414726e-4),
    (220, 9.543673507e-4), (221, 9.521019366e-4), (222, 9.498451845e-4), (223, 9.475970490e-4),
    (224, 9.453574853e-4), (225, 9.431264485e-4), (226, 9.409038942e-4), (227, 9.386897783e-4),
    (228, 9.364840568e-4), (229, 9.342866863e-4), (230, 9.320976234e-4), (231, 9.299168252e-4),
    (232, 9.277442489e-4), (233, 9.255798521e-4), (234, 9.234235927e-4), (235, 9.212754288e-4),
    (236, 9.191353187e-4), (237, 9.170032213e-4), (238, 9.148790953e-4), (239, 9.127629000e-4),
    (240, 9.106545949e-4), (241, 9.085541397e-4), (242, 9.064614945e-4), (243, 9.043766194e-4),
    (244, 9.022994750e-4), (245, 9.002300220e-4), (246, 8.981682215e-4), (247, 8.961140348e-4),
    (248, 8.940674234e-4), (249, 8.920283490e-4), (250, 8.899967737e-4), (251, 8.879726597e-4),
    (252, 8.859559695e-4), (253, 8.839466660e-4), (254, 8.819447119e-4), (255, 8.799500707e-4),
    (256, 8.779627056e-4), (257, 8.759825805e-4), (258, 8.740096592e-4), (259, 8.720439058e-4),
    (260, 8.700852848e-4), (261, 8.681337608e-4), (262, 8.661892984e-4), (263, 8.642518629e-4),
    (264, 8.623214194e-4), (265, 8.603979335e-4), (266, 8.584813708e-4), (267, 8.565716972e-4),
    (268, 8.546688789e-4), (269, 8.527728823e-4), (270, 8.508836738e-4), (271, 8.490012202e-4),
    (272, 8.471254886e-4), (273, 8.452564460e-4), (274, 8.433940598e-4), (275, 8.415382977e-4),
    (276, 8.396891273e-4), (277, 8.378465168e-4), (278, 8.360104342e-4), (279, 8.341808480e-4),
    (280, 8.323577267e-4), (281, 8.305410391e-4), (282, 8.287307541e-4), (283, 8.269268409e-4),
    (284, 8.251292688e-4), (285, 8.233380074e-4), (286, 8.215530263e-4), (287, 8.197742955e-4),
    (288, 8.180017851e-4), (289, 8.162354652e-4), (290, 8.144753064e-4), (291, 8.127212794e-4),
    (292, 8.109733548e-4), (293, 8.092315036e-4), (294, 8.074956971e-4), (295, 8.057659066e-4),
    (296, 8.040421036e-4), (297, 8.023242597e-4), (298, 8.006123468e-4), (299, 7.989063369e-4),
    (300, 7.972062023e-4), (301, 7.955119152e-4), (302, 7.938234482e-4), (303, 7.921407740e-4),
    (304, 7.904638654e-4), (305, 7.887926954e-4), (306, 7.871272373e-4), (307, 7.854674643e-4),
    (308, 7.838133500e-4), (309, 7.821648680e-4), (310, 7.805219920e-4), (311, 7.788846961e-4),
    (312, 7.772529544e-4), (313, 7.756267412e-4), (314, 7.740060308e-4), (315, 7.723907979e-4),
    (316, 7.707810172e-4), (317, 7.691766635e-4), (318, 7.675777119e-4), (319, 7.659841375e-4),
    (320, 7.643959157e-4), (321, 7.628130219e-4), (322, 7.612354318e-4), (323, 7.596631209e-4),
    (324, 7.580960654e-4), (325, 7.565342411e-4), (326, 7.549776242e-4), (327, 7.534261911e-4),
    (328, 7.518799183e-4), (329, 7.503387821e-4), (330, 7.488027595e-4), (331, 7.472718273e-4),
    (332, 7.457459623e-4), (333, 7.442251419e-4), (334, 7.427093431e-4), (335, 7.411985434e-4),
    (336, 7.396927203e-4), (337, 7.381918515e-4), (338, 7.366959147e-4), (339, 7.352048877e-4),
    (340, 7.337187488e-4), (341, 7.322374759e-4), (342, 7.307610473e-4), (343, 7.292894416e-4),
    (344, 7.278226371e-4), (345, 7.263606125e-4), (346, 7.249033467e-4), (347, 7.234508184e-4),
    (348, 7.220030067e-4), (349, 7.205598907e-4), (350, 7.191214497e-4), (351, 7.176876631e-4),
    (352, 7.162585102e-4), (353, 7.148339707e-4), (354, 7.134140243e-4), (355, 7.119986508e-4),
    (356, 7.105878302e-4), (357, 7.091815425e-4), (358, 7.077797679e-4), (359, 7.063824867e-4),
    (360, 7.049896791e-4), (361, 7.036013258e-4), (362, 7.022174073e-4), (363, 7.008379043e-4),
    (364, 6.994627977e-4), (365, 6.980920684e-4), (366, 6.967256973e-4), (367, 6.953636657e-4),
    (368, 6.940059548e-4), (369, 6.926525458e-4), (370, 6.913034204e-4), (371, 6.899585599e-4),
    (372, 6.886179462e-4), (373, 6.872815608e-4), (374, 6.859493857e-4), (375, 6.846214028e-4),
    (376, 6.832975942e-4), (377, 6.819779419e-4), (378, 6.806624284e-4), (379, 6.793510359e-4),
    (380, 6.780437468e-4), (381, 6.767405437e-4), (382, 6.754414092e-4), (383, 6.741463260e-4),
    (384, 6.728552770e-4), (385, 6.715682451e-4), (386, 6.702852132e-4), (387, 6.690061646e-4),
    (388, 6.677310823e-4), (389, 6.664599496e-4), (390, 6.651927499e-4), (391, 6.639294668e-4),
    (392, 6.626700836e-4), (393, 6.614145841e-4), (394, 6.601629521e-4), (395, 6.589151712e-4),
    (396, 6.576712254e-4), (397, 6.564310987e-4), (398, 6.551947751e-4), (399, 6.539622389e-4),
    (400, 6.527334742e-4), (401, 6.515084654e-4), (402, 6.502871969e-4), (403, 6.490696532e-4),
    (404, 6.478558188e-4), (405, 6.466456785e-4), (406, 6.454392169e-4), (407, 6.442364188e-4),
    (408, 6.430372692e-4), (409, 6.418417531e-4), (410, 6.406498555e-4), (411, 6.394615615e-4),
    (412, 6.382768563e-4), (413, 6.370957253e-4), (414, 6.359181538e-4), (415, 6.347441273e-4),
    (416, 6.335736312e-4), (417, 6.324066512e-4), (418, 6.312431730e-4), (419, 6.300831823e-4),
    (420, 6.289266648e-4), (421, 6.277736066e-4), (422, 6.266239936e-4), (423, 6.254778118e-4),
    (424, 6.243350474e-4), (425, 6.231956864e-4), (426, 6.220597153e-4), (427, 6.209271203e-4),
    (428, 6.197978877e-4), (429, 6.186720042e-4), (430, 6.175494562e-4), (431, 6.164302303e-4),
    (432, 6.153143133e-4), (433, 6.142016918e-4), (434, 6.130923526e-4), (435, 6.119862828e-4),
    (436, 6.108834691e-4), (437, 6.097838987e-4), (438, 6.086875585e-4), (439, 6.075944358e-4),
    (440, 6.065045178e-4), (441, 6.054177917e-4), (442, 6.043342449e-4), (443, 6.032538647e-4),
    (444, 6.021766388e-4), (445, 6.011025545e-4), (446, 6.000315996e-4), (447, 5.989637616e-4),
    (448, 5.978990283e-4), (449, 5.968373874e-4), (450, 5.957788269e-4), (451, 5.947233346e-4),
    (452, 5.936708985e-4), (453, 5.926215066e-4), (454, 5.915751470e-4), (455, 5.905318078e-4),
    (456, 5.894914773e-4), (457, 5.884541438e-4), (458, 5.874197955e-4), (459, 5.863884209e-4),
    (460, 5.853600083e-4), (461, 5.843345463e-4), (462, 5.833120235e-4), (463, 5.822924284e-4),
    (464, 5.812757497e-4), (465, 5.802619762e-4), (466, 5.792510966e-4), (467, 5.782430998e-4),
    (468, 5.772379746e-4), (469, 5.762357100e-4), (470, 5.752362951e-4), (471, 5.742397188e-4),
    (472, 5.732459702e-4), (473, 5.722550386e-4), (474, 5.712669132e-4), (475, 5.702815832e-4),
    (476, 5.692990379e-4), (477, 5.683192667e-4), (478, 5.673422591e-4), (479, 5.663680045e-4),
    (480, 5.653964924e-4), (481, 5.644277124e-4), (482, 5.634616543e-4), (483, 5.624983075e-4),
    (484, 5.615376619e-4), (485, 5.605797073e-4), (486, 5.596244334e-4), (487, 5.586718302e-4),
    (488, 5.577218876e-4), (489, 5.567745955e-4), (490, 5.558299440e-4), (491, 5.548879232e-4),
    (492, 5.539485231e-4), (493, 5.530117340e-4), (494, 5.520775460e-4), (495, 5.511459495e-4),
    (496, 5.502169347e-4), (497, 5.492904920e-4), (498, 5.483666117e-4), (499, 5.474452844e-4),
    (500, 5.465265005e-4), (501, 5.456102506e-4), (502, 5.446965253e-4), (503, 5.437853151e-4),
    (504, 5.428766107e-4), (505, 5.419704029e-4), (506, 5.410666824e-4), (507, 5.401654401e-4),
    (508, 5.392666667e-4), (509, 5.383703532e-4), (510, 5.374764905e-4), (511, 5.365850695e-4),
    (512, 5.356960814e-4), (513, 5.348095170e-4), (514, 5.339253677e-4), (515, 5.330436244e-4),
    (516, 5.321642785e-4), (517, 5.312873210e-4), (518, 5.304127433e-4), (519, 5.295405367e-4),
    (520, 5.286706926e-4), (521, 5.278032022e-4), (522, 5.269380572e-4), (523, 5.260752488e-4),
    (524, 5.252147687e-4), (525, 5.243566084e-4), (526, 5.235007595e-4), (527, 5.226472135e-4),
    (528, 5.217959622e-4), (529, 5.209469973e-4), (530, 5.201003105e-4), (531, 5.192558936e-4),
    (532, 5.184137385e-4), (533, 5.175738368e-4), (534, 5.167361807e-4), (535, 5.159007619e-4),
    (536, 5.150675725e-4), (537, 5.142366045e-4), (538, 5.134078499e-4), (539, 5.125813007e-4),
    (540, 5.117569492e-4), (541, 5.109347874e-4), (542, 5.101148075e-4), (543, 5.092970018e-4),
    (544, 5.084813625e-4), (545, 5.076678819e-4), (546, 5.068565523e-4), (547, 5.060473661e-4),
    (548, 5.052403157e-4), (549, 5.044353935e-4), (550, 5.036325920e-4), (551, 5.028319037e-4),
    (552, 5.020333210e-4), (553, 5.012368367e-4), (554, 5.004424432e-4), (555, 4.996501333e-4),
    (556, 4.988598995e-4), (557, 4.980717346e-4), (558, 4.972856313e-4), (559, 4.965015823e-4),
    (560, 4.957195805e-4), (561, 4.949396188e-4), (562, 4.941616898e-4), (563, 4.933857867e-4),
    (564, 4.926119021e-4), (565, 4.918400293e-4), (566, 4.910701610e-4), (567, 4.903022903e-4),
    (568, 4.895364104e-4), (569, 4.887725142e-4), (570, 4.880105948e-4), (571, 4.872506455e-4),
    (572, 4.864926594e-4), (573, 4.857366296e-4), (574, 4.849825495e-4), (575, 4.842304122e-4),
    (576, 4.834802111e-4), (577, 4.827319394e-4), (578, 4.819855907e-4), (579, 4.812411581e-4),
    (580, 4.804986351e-4), (581, 4.797580152e-4), (582, 4.790192918e-4), (583, 4.782824585e-4),
    (584, 4.775475086e-4), (585, 4.768144359e-4), (586, 4.760832338e-4), (587, 4.753538960e-4),
    (588, 4.746264161e-4), (589, 4.739007878e-4), (590, 4.731770047e-4), (591, 4.724550606e-4),
    (592, 4.717349493e-4), (593, 4.710166644e-4), (594, 4.703001998e-4), (595, 4.695855493e-4),
    (596, 4.688727067e-4), (597, 4.681616660e-4), (598, 4.674524211e-4), (599, 4.667449658e-4),
    (600, 4.660392941e-4);
UPDATE viscosity AS here SET step_pa_s = following.viscosity_pa_s - here.viscosity_pa_s
FROM viscosity AS following WHERE following.tenths = here.tenths + 1;
