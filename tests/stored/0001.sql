BEGIN TRANSACTION;
CREATE TABLE cell (
	id INTEGER NOT NULL, 
	record INTEGER NOT NULL, 
	label TEXT NOT NULL, 
	electrode INTEGER NOT NULL, 
	electrolyte INTEGER NOT NULL, 
	specimen TEXT NOT NULL, 
	area_cm2 REAL NOT NULL, 
	configuration TEXT NOT NULL, 
	reference TEXT, 
	assembled_at TEXT, 
	assembled_offset INTEGER, 
	operator TEXT, 
	note TEXT, 
	entry INTEGER NOT NULL, 
	ended_by INTEGER, 
	PRIMARY KEY (id), 
	CHECK (id >= 1), 
	CHECK (record <= id), 
	CHECK (length(trim("label")) > 0), 
	CHECK (length(trim("specimen")) > 0), 
	CHECK ("area_cm2" > 0 AND "area_cm2" <= 1.7976931348623157e308), 
	CHECK (length(trim("configuration")) > 0), 
	CHECK (configuration IN ('three-electrode', 'two-electrode', 'symmetric')), 
	CHECK (length(trim("reference")) > 0), 
	CHECK (length(trim("assembled_at")) > 0), 
	CHECK ("assembled_at" LIKE '____-__-__T__:__:__.______Z'), 
	CHECK (length(trim("operator")) > 0), 
	CHECK (length(trim("note")) > 0), 
	CHECK (ended_by IS NULL OR ended_by > entry), 
	FOREIGN KEY(record) REFERENCES cell (id), 
	FOREIGN KEY(electrode) REFERENCES electrode (id), 
	FOREIGN KEY(electrolyte) REFERENCES electrolyte (id), 
	FOREIGN KEY(entry) REFERENCES journal (id), 
	FOREIGN KEY(ended_by) REFERENCES journal (id)
)
 STRICT

;
INSERT INTO "cell" VALUES(1,1,'C1',1,1,'C1',1.11,'three-electrode','Na/Na+','2026-03-01T07:00:00.000000Z',60,NULL,NULL,2,4);
INSERT INTO "cell" VALUES(2,2,'C2',1,2,'C2',1.12,'two-electrode','Na/Na+','2026-03-02T07:00:00.000000Z',60,NULL,NULL,2,7);
INSERT INTO "cell" VALUES(3,1,'C1',1,1,'C1',1.12,'three-electrode','Na/Na+','2026-03-01T07:00:00.000000Z',60,NULL,'µm rule',4,NULL);
CREATE TABLE cost (
	id INTEGER NOT NULL, 
	record INTEGER NOT NULL, 
	name TEXT NOT NULL, 
	hours REAL NOT NULL, 
	entry INTEGER NOT NULL, 
	ended_by INTEGER, 
	PRIMARY KEY (id), 
	CHECK (id >= 1), 
	CHECK (record <= id), 
	CHECK (length(trim("name")) > 0), 
	CHECK ("hours" >= 0 AND "hours" <= 1.7976931348623157e308), 
	CHECK (ended_by IS NULL OR ended_by > entry), 
	FOREIGN KEY(record) REFERENCES cost (id), 
	FOREIGN KEY(entry) REFERENCES journal (id), 
	FOREIGN KEY(ended_by) REFERENCES journal (id)
)
 STRICT

;
CREATE TABLE criterion (
	id INTEGER NOT NULL, 
	record INTEGER NOT NULL, 
	name TEXT NOT NULL, 
	value REAL NOT NULL, 
	entry INTEGER NOT NULL, 
	ended_by INTEGER, 
	PRIMARY KEY (id), 
	CHECK (id >= 1), 
	CHECK (record <= id), 
	CHECK (length(trim("name")) > 0), 
	CHECK ("value" >= 0 AND "value" <= 1.7976931348623157e308), 
	CHECK (ended_by IS NULL OR ended_by > entry), 
	FOREIGN KEY(record) REFERENCES criterion (id), 
	FOREIGN KEY(entry) REFERENCES journal (id), 
	FOREIGN KEY(ended_by) REFERENCES journal (id)
)
 STRICT

;
INSERT INTO "criterion" VALUES(1,1,'ratio_margin',1.6,5,NULL);
CREATE TABLE electrode (
	id INTEGER NOT NULL, 
	record INTEGER NOT NULL, 
	label TEXT NOT NULL, 
	material TEXT, 
	ion TEXT NOT NULL, 
	charge INTEGER NOT NULL, 
	form TEXT, 
	diffusion_length_cm REAL, 
	diffusivity_cm2_s REAL, 
	porosity REAL, 
	pore_resistance_ohm_cm2 REAL, 
	pore_electrolyte INTEGER, 
	"pore_temperature_K" REAL, 
	"window_low_V" REAL, 
	"window_high_V" REAL, 
	window_reference TEXT, 
	"maximum_temperature_K" REAL, 
	note TEXT, 
	entry INTEGER NOT NULL, 
	ended_by INTEGER, 
	PRIMARY KEY (id), 
	CHECK (id >= 1), 
	CHECK (record <= id), 
	CHECK (length(trim("label")) > 0), 
	CHECK (length(trim("material")) > 0), 
	CHECK (length(trim("ion")) > 0), 
	CHECK (charge BETWEEN 1 AND 4), 
	CHECK (length(trim("form")) > 0), 
	CHECK ("diffusion_length_cm" > 0 AND "diffusion_length_cm" <= 1.7976931348623157e308), 
	CHECK ("diffusivity_cm2_s" > 0 AND "diffusivity_cm2_s" <= 1.7976931348623157e308), 
	CHECK ("porosity" > 0 AND "porosity" <= 1.7976931348623157e308), 
	CHECK (porosity < 1), 
	CHECK ("pore_resistance_ohm_cm2" > 0 AND "pore_resistance_ohm_cm2" <= 1.7976931348623157e308), 
	CHECK ("pore_temperature_K" > 0 AND "pore_temperature_K" <= 1.7976931348623157e308), 
	CHECK ("window_low_V" >= -1.7976931348623157e308 AND "window_low_V" <= 1.7976931348623157e308), 
	CHECK ("window_high_V" >= -1.7976931348623157e308 AND "window_high_V" <= 1.7976931348623157e308), 
	CHECK (length(trim("window_reference")) > 0), 
	CHECK ("maximum_temperature_K" > 0 AND "maximum_temperature_K" <= 1.7976931348623157e308), 
	CHECK (length(trim("note")) > 0), 
	CHECK (ended_by IS NULL OR ended_by > entry), 
	CHECK ("window_low_V" < "window_high_V"), 
	CHECK (("window_low_V" IS NULL AND "window_high_V" IS NULL) OR window_reference IS NOT NULL), 
	FOREIGN KEY(record) REFERENCES electrode (id), 
	FOREIGN KEY(pore_electrolyte) REFERENCES electrolyte (id), 
	FOREIGN KEY(entry) REFERENCES journal (id), 
	FOREIGN KEY(ended_by) REFERENCES journal (id)
)
 STRICT

;
INSERT INTO "electrode" VALUES(1,1,'film','NaMO2','Na',1,'thin film',NULL,NULL,NULL,NULL,NULL,NULL,NULL,NULL,NULL,NULL,NULL,2,NULL);
CREATE TABLE electrolyte (
	id INTEGER NOT NULL, 
	record INTEGER NOT NULL, 
	"key" TEXT NOT NULL, 
	written TEXT NOT NULL, 
	salt_key TEXT NOT NULL, 
	solvent_key TEXT NOT NULL, 
	additive_key TEXT NOT NULL, 
	basis TEXT NOT NULL, 
	aqueous INTEGER NOT NULL, 
	density_g_cm3 REAL, 
	"minimum_temperature_K" REAL, 
	"maximum_temperature_K" REAL, 
	note TEXT, 
	entry INTEGER NOT NULL, 
	ended_by INTEGER, 
	PRIMARY KEY (id), 
	CHECK (id >= 1), 
	CHECK (record <= id), 
	CHECK (length(trim("key")) > 0), 
	CHECK (length(trim("written")) > 0), 
	CHECK (length(trim("salt_key")) > 0), 
	CHECK (length(trim("solvent_key")) > 0), 
	CHECK (length(trim("additive_key")) > 0), 
	CHECK (length(trim("basis")) > 0), 
	CHECK (basis IN ('mol/L', 'mol/kg')), 
	CHECK (aqueous IN (0, 1)), 
	CHECK ("density_g_cm3" > 0 AND "density_g_cm3" <= 1.7976931348623157e308), 
	CHECK ("minimum_temperature_K" > 0 AND "minimum_temperature_K" <= 1.7976931348623157e308), 
	CHECK ("maximum_temperature_K" > 0 AND "maximum_temperature_K" <= 1.7976931348623157e308), 
	CHECK (length(trim("note")) > 0), 
	CHECK (ended_by IS NULL OR ended_by > entry), 
	CHECK ("minimum_temperature_K" < "maximum_temperature_K"), 
	FOREIGN KEY(record) REFERENCES electrolyte (id), 
	FOREIGN KEY(entry) REFERENCES journal (id), 
	FOREIGN KEY(ended_by) REFERENCES journal (id)
)
 STRICT

;
INSERT INTO "electrolyte" VALUES(1,1,'1 mol/L NaPF6 in EC:DMC (1:1 v/v) + 2 wt% FEC','1 M NaPF6 in EC:DMC (1:1 v/v) + 2 wt% FEC','NaPF6','EC:DMC (1:1 v/v)','2 wt% FEC','mol/L',0,NULL,NULL,NULL,NULL,2,NULL);
INSERT INTO "electrolyte" VALUES(2,2,'0.5 mol/L NaClO4 in PC','0.5 M NaClO4 in PC','NaClO4','PC','none','mol/L',0,NULL,NULL,NULL,NULL,2,NULL);
CREATE TABLE electrolyte_component (
	electrolyte INTEGER NOT NULL, 
	position INTEGER NOT NULL, 
	role TEXT NOT NULL, 
	species TEXT NOT NULL, 
	amount REAL NOT NULL, 
	basis TEXT NOT NULL, 
	entry INTEGER NOT NULL, 
	ended_by INTEGER, 
	PRIMARY KEY (electrolyte, position), 
	CHECK (length(trim("role")) > 0), 
	CHECK (role IN ('salt', 'solvent', 'additive')), 
	CHECK (length(trim("species")) > 0), 
	CHECK ("amount" > 0 AND "amount" <= 1.7976931348623157e308), 
	CHECK (length(trim("basis")) > 0), 
	CHECK (ended_by IS NULL OR ended_by > entry), 
	CHECK (role <> 'solvent' OR amount <= 1), 
	FOREIGN KEY(electrolyte) REFERENCES electrolyte (id) DEFERRABLE INITIALLY DEFERRED, 
	FOREIGN KEY(entry) REFERENCES journal (id), 
	FOREIGN KEY(ended_by) REFERENCES journal (id)
)
 WITHOUT ROWID,
 STRICT

;
INSERT INTO "electrolyte_component" VALUES(1,0,'salt','NaPF6',1.0,'mol/L',2,NULL);
INSERT INTO "electrolyte_component" VALUES(1,1,'solvent','EC',0.5,'v/v',2,NULL);
INSERT INTO "electrolyte_component" VALUES(1,2,'solvent','DMC',0.5,'v/v',2,NULL);
INSERT INTO "electrolyte_component" VALUES(1,3,'additive','FEC',2.0,'wt%',2,NULL);
INSERT INTO "electrolyte_component" VALUES(2,0,'salt','NaClO4',0.5,'mol/L',2,NULL);
INSERT INTO "electrolyte_component" VALUES(2,1,'solvent','PC',1.0,'v/v',2,NULL);
CREATE TABLE electrolyte_property (
	electrolyte INTEGER NOT NULL, 
	property TEXT NOT NULL, 
	"temperature_K" REAL NOT NULL, 
	value REAL NOT NULL, 
	entry INTEGER NOT NULL, 
	ended_by INTEGER, 
	PRIMARY KEY (electrolyte, property, "temperature_K"), 
	CHECK (property IN ('conductivity_S_cm', 'activity_coefficient')), 
	CHECK ("temperature_K" > 0 AND "temperature_K" <= 1.7976931348623157e308), 
	CHECK ("value" > 0 AND "value" <= 1.7976931348623157e308), 
	CHECK (ended_by IS NULL OR ended_by > entry), 
	FOREIGN KEY(electrolyte) REFERENCES electrolyte (id), 
	FOREIGN KEY(entry) REFERENCES journal (id), 
	FOREIGN KEY(ended_by) REFERENCES journal (id)
)
 WITHOUT ROWID,
 STRICT

;
CREATE TABLE fit (
	id INTEGER NOT NULL, 
	record INTEGER NOT NULL, 
	measurement INTEGER NOT NULL, 
	fitted_at TEXT, 
	fitted_offset INTEGER, 
	fitted_by TEXT, 
	circuit TEXT, 
	weighting TEXT, 
	chi2 REAL, 
	entry INTEGER NOT NULL, 
	ended_by INTEGER, 
	PRIMARY KEY (id), 
	CHECK (id >= 1), 
	CHECK (record <= id), 
	CHECK (length(trim("fitted_at")) > 0), 
	CHECK ("fitted_at" LIKE '____-__-__T__:__:__.______Z'), 
	CHECK (length(trim("fitted_by")) > 0), 
	CHECK (length(trim("circuit")) > 0), 
	CHECK (length(trim("weighting")) > 0), 
	CHECK ("chi2" >= 0 AND "chi2" <= 1.7976931348623157e308), 
	CHECK (ended_by IS NULL OR ended_by > entry), 
	FOREIGN KEY(record) REFERENCES fit (id), 
	FOREIGN KEY(measurement) REFERENCES measurement (id), 
	FOREIGN KEY(entry) REFERENCES journal (id), 
	FOREIGN KEY(ended_by) REFERENCES journal (id)
)
 STRICT

;
INSERT INTO "fit" VALUES(1,1,1,NULL,NULL,NULL,NULL,NULL,NULL,2,NULL);
INSERT INTO "fit" VALUES(2,2,2,NULL,NULL,NULL,NULL,NULL,NULL,2,3);
INSERT INTO "fit" VALUES(3,3,3,NULL,NULL,NULL,NULL,NULL,NULL,2,NULL);
INSERT INTO "fit" VALUES(4,4,4,NULL,NULL,NULL,NULL,NULL,NULL,2,3);
INSERT INTO "fit" VALUES(5,5,5,NULL,NULL,NULL,NULL,NULL,NULL,2,7);
INSERT INTO "fit" VALUES(6,6,6,NULL,NULL,NULL,NULL,NULL,NULL,2,7);
INSERT INTO "fit" VALUES(7,7,2,NULL,NULL,NULL,NULL,NULL,NULL,3,6);
INSERT INTO "fit" VALUES(8,8,4,NULL,NULL,NULL,NULL,NULL,NULL,3,7);
CREATE TABLE fitted_value (
	fit INTEGER NOT NULL, 
	quantity TEXT NOT NULL, 
	value REAL, 
	se REAL, 
	entry INTEGER NOT NULL, 
	ended_by INTEGER, 
	PRIMARY KEY (fit, quantity), 
	CHECK ("value" > 0 AND "value" <= 1.7976931348623157e308), 
	CHECK ("se" > 0 AND "se" <= 1.7976931348623157e308), 
	CHECK (se IS NULL OR value IS NOT NULL), 
	CHECK (ended_by IS NULL OR ended_by > entry), 
	CHECK (value IS NOT NULL OR quantity IN ('R_sl', 'R_lat')), 
	CHECK (substr(quantity, 1, 2) <> 'n_' OR value <= 1), 
	FOREIGN KEY(fit) REFERENCES fit (id), 
	FOREIGN KEY(quantity) REFERENCES quantity (name), 
	FOREIGN KEY(entry) REFERENCES journal (id), 
	FOREIGN KEY(ended_by) REFERENCES journal (id)
)
 WITHOUT ROWID,
 STRICT

;
INSERT INTO "fitted_value" VALUES(1,'R_ct',41.0,0.8,2,NULL);
INSERT INTO "fitted_value" VALUES(1,'R_el',4.1,NULL,2,NULL);
INSERT INTO "fitted_value" VALUES(1,'R_sl',NULL,NULL,2,NULL);
INSERT INTO "fitted_value" VALUES(2,'Q_sl',2.0e-06,NULL,2,3);
INSERT INTO "fitted_value" VALUES(2,'R_ct',42.0,0.8,2,3);
INSERT INTO "fitted_value" VALUES(2,'R_el',4.2,NULL,2,3);
INSERT INTO "fitted_value" VALUES(2,'R_sl',7.5,NULL,2,3);
INSERT INTO "fitted_value" VALUES(2,'n_sl',0.9,NULL,2,3);
INSERT INTO "fitted_value" VALUES(3,'R_ct',43.0,0.8,2,NULL);
INSERT INTO "fitted_value" VALUES(3,'R_el',4.3,NULL,2,NULL);
INSERT INTO "fitted_value" VALUES(3,'R_sl',7.9,NULL,2,NULL);
INSERT INTO "fitted_value" VALUES(4,'R_ct',42.0,0.8,2,3);
INSERT INTO "fitted_value" VALUES(4,'R_el',4.1,NULL,2,3);
INSERT INTO "fitted_value" VALUES(4,'R_sl',NULL,NULL,2,3);
INSERT INTO "fitted_value" VALUES(5,'Q_sl',2.0e-06,NULL,2,7);
INSERT INTO "fitted_value" VALUES(5,'R_ct',44.0,0.8,2,7);
INSERT INTO "fitted_value" VALUES(5,'R_el',4.2,NULL,2,7);
INSERT INTO "fitted_value" VALUES(5,'R_sl',7.5,NULL,2,7);
INSERT INTO "fitted_value" VALUES(5,'n_sl',0.9,NULL,2,7);
INSERT INTO "fitted_value" VALUES(6,'R_ct',46.0,0.8,2,7);
INSERT INTO "fitted_value" VALUES(6,'R_el',4.3,NULL,2,7);
INSERT INTO "fitted_value" VALUES(6,'R_sl',7.9,NULL,2,7);
INSERT INTO "fitted_value" VALUES(7,'Q_sl',2.0e-06,NULL,3,6);
INSERT INTO "fitted_value" VALUES(7,'R_ct',43.5,0.7,3,6);
INSERT INTO "fitted_value" VALUES(7,'R_el',4.2,NULL,3,6);
INSERT INTO "fitted_value" VALUES(7,'R_sl',7.5,NULL,3,6);
INSERT INTO "fitted_value" VALUES(7,'n_sl',0.9,NULL,3,6);
INSERT INTO "fitted_value" VALUES(8,'R_ct',43.5,0.7,3,7);
INSERT INTO "fitted_value" VALUES(8,'R_el',4.1,NULL,3,7);
INSERT INTO "fitted_value" VALUES(8,'R_sl',NULL,NULL,3,7);
CREATE TABLE imported_file (
	id INTEGER NOT NULL, 
	name TEXT NOT NULL, 
	sha256 TEXT NOT NULL, 
	row_count INTEGER NOT NULL, 
	entry INTEGER NOT NULL, 
	ended_by INTEGER, 
	PRIMARY KEY (id), 
	CHECK (id >= 1), 
	CHECK (length(trim("name")) > 0), 
	CHECK (length(trim("sha256")) > 0), 
	CHECK (length(sha256) = 64), 
	CHECK (row_count >= 0), 
	CHECK (ended_by IS NULL OR ended_by > entry), 
	FOREIGN KEY(entry) REFERENCES journal (id), 
	FOREIGN KEY(ended_by) REFERENCES journal (id)
)
 STRICT

;
INSERT INTO "imported_file" VALUES(1,'first.csv','ad263d9f3a09a69092d0661b6fd4b10a54a18fb17a776d0b268f67d2ae232384',6,2,NULL);
INSERT INTO "imported_file" VALUES(2,'second.csv','1aa4faae264f0cb997c53b681914a661a3cfdbd2d9002974e1489d9a478bf674',6,3,NULL);
CREATE TABLE journal (
	id INTEGER NOT NULL, 
	at TEXT NOT NULL, 
	who TEXT NOT NULL, 
	action TEXT NOT NULL, 
	subject TEXT NOT NULL, 
	"before" TEXT, 
	"after" TEXT, 
	reason TEXT, 
	previous TEXT NOT NULL, 
	hash TEXT NOT NULL, 
	PRIMARY KEY (id), 
	CHECK (id >= 1), 
	CHECK (length(trim("at")) > 0), 
	CHECK ("at" LIKE '____-__-__T__:__:__.______Z'), 
	CHECK (length(trim("who")) > 0), 
	CHECK (length(trim("action")) > 0), 
	CHECK (length(trim("subject")) > 0), 
	CHECK (length(trim("before")) > 0), 
	CHECK (length(trim("after")) > 0), 
	CHECK (length(trim("reason")) > 0), 
	CHECK (length(previous) = 64 AND length(hash) = 64), 
	UNIQUE (previous), 
	UNIQUE (hash)
)
 STRICT

;
INSERT INTO "journal" VALUES(1,'2026-12-01T18:11:43.035791Z','tester','start','campaign','{}','{"made":{"setting":1},"made_digest":"758c7c798c179fa1c444456655700ba53247890f465a88b7e12a8b2d46268af1"}',NULL,'0000000000000000000000000000000000000000000000000000000000000000','d14d01f6a2db14911bf84c8696a4fd15eb185c8ec0de9ea3850466adeff918b0');
INSERT INTO "journal" VALUES(2,'2026-12-01T18:11:43.283506Z','tester','import','import 1: first.csv','{}','{"import":1,"made":{"cell":2,"electrode":1,"electrolyte":2,"electrolyte_component":6,"fit":6,"fitted_value":22,"imported_file":1,"measurement":6},"made_digest":"9a7fca69c1931d5128b4009d5798e0f2e85904bb664b188061a69bb62f70f8fa"}',NULL,'d14d01f6a2db14911bf84c8696a4fd15eb185c8ec0de9ea3850466adeff918b0','768751bfef48afe18a4e907504cbe015a6fbf16147133956cb7ee3a2e48ab84c');
INSERT INTO "journal" VALUES(3,'2026-12-01T18:11:43.373916Z','tester','import','import 2: second.csv','{"ended":{"fit":2,"fitted_value":8},"ended_digest":"61e583e0fec10247c3590904c5c104550c8ad8975062d028d7588e44f9cd5c7e"}','{"import":2,"made":{"fit":2,"fitted_value":8,"imported_file":1},"made_digest":"8328a60a113b6530f55f005025d86c4f3fd7c265c6ada56d0f4d207d749ac288"}',NULL,'768751bfef48afe18a4e907504cbe015a6fbf16147133956cb7ee3a2e48ab84c','e08e7e4ac5035ecfede7f1b0b877b54713da937b93965968c599d68b29b4f6c8');
INSERT INTO "journal" VALUES(4,'2026-12-01T18:11:43.416381Z','tester','amend','cell C1','{"ended":{"cell":1},"ended_digest":"1e873482f8c7e8ded7a24cfcd5b0b29916a761dbc6f4721028100308c3c7776d","was":{"area_cm2":1.11,"note":null}}','{"is":{"area_cm2":1.12,"note":"µm rule"},"made":{"cell":1},"made_digest":"de25cc6c28428e754a6faa2eaf1bfb6fc3ff5b568d727a30d4a969d6bdaf31b4"}','measured','e08e7e4ac5035ecfede7f1b0b877b54713da937b93965968c599d68b29b4f6c8','01ce2e4b78dde09155c4b7e9b8fa0f7fa558882760194bdf357c27c7a5a1eccf');
INSERT INTO "journal" VALUES(5,'2026-12-01T18:11:43.452927Z','tester','criteria','ratio_margin','{"was":{"ratio_margin":1.5}}','{"is":{"ratio_margin":1.6},"made":{"criterion":1},"made_digest":"69b89580f744c6bedebb3033767ed593713c5915904d36aa9ec18c65199899e3"}','agreed in the group','01ce2e4b78dde09155c4b7e9b8fa0f7fa558882760194bdf357c27c7a5a1eccf','fa4a2559a417184c306c2c5834459ef28b96e51a5fadb7ab76e099c56f3e4715');
INSERT INTO "journal" VALUES(6,'2026-12-01T18:11:43.474977Z','tester','withdraw','measurement 2 of cell C1 (2026-03-12 09:00 UTC)','{"ended":{"fit":1,"fitted_value":5,"measurement":1},"ended_digest":"5ae21b5871bfcae6a62f6836e0f8598374f7368f16ca0851db5e03097f8bbf2d"}','{}','bubble','fa4a2559a417184c306c2c5834459ef28b96e51a5fadb7ab76e099c56f3e4715','bf0f953752717ccffeb495680404c44af45e38405e056d29f93984cf8c08bbfd');
INSERT INTO "journal" VALUES(7,'2026-12-01T18:11:43.526249Z','tester','withdraw','cell C2','{"ended":{"cell":1,"fit":3,"fitted_value":11,"measurement":3},"ended_digest":"6ce441356800f742d1b425ca336353b873a26d72eebf78e0fb233158cfff0531"}','{}','leaked','bf0f953752717ccffeb495680404c44af45e38405e056d29f93984cf8c08bbfd','a8647d3ac57f3f6ab7f5599270bd20e243b5422b88f714a54ed7828cb10800a4');
CREATE TABLE measurement (
	id INTEGER NOT NULL, 
	record INTEGER NOT NULL, 
	cell INTEGER NOT NULL, 
	measured_at TEXT NOT NULL, 
	measured_offset INTEGER NOT NULL, 
	"potential_V" REAL, 
	"temperature_K" REAL NOT NULL, 
	ion_content REAL, 
	"E_half_V" REAL, 
	cycle INTEGER, 
	direction TEXT, 
	rest_h REAL, 
	"amplitude_mV" REAL, 
	"f_min_Hz" REAL, 
	"f_max_Hz" REAL, 
	operator TEXT, 
	instrument TEXT, 
	spectrum TEXT, 
	spectrum_sha256 TEXT, 
	note TEXT, 
	entry INTEGER NOT NULL, 
	ended_by INTEGER, 
	PRIMARY KEY (id), 
	CHECK (id >= 1), 
	CHECK (record <= id), 
	CHECK (length(trim("measured_at")) > 0), 
	CHECK ("measured_at" LIKE '____-__-__T__:__:__.______Z'), 
	CHECK ("potential_V" >= -1.7976931348623157e308 AND "potential_V" <= 1.7976931348623157e308), 
	CHECK ("temperature_K" > 0 AND "temperature_K" <= 1.7976931348623157e308), 
	CHECK ("ion_content" >= 0 AND "ion_content" <= 1), 
	CHECK ("E_half_V" >= -1.7976931348623157e308 AND "E_half_V" <= 1.7976931348623157e308), 
	CHECK (cycle >= 0), 
	CHECK (length(trim("direction")) > 0), 
	CHECK ("rest_h" >= 0 AND "rest_h" <= 1.7976931348623157e308), 
	CHECK ("amplitude_mV" > 0 AND "amplitude_mV" <= 1.7976931348623157e308), 
	CHECK ("f_min_Hz" > 0 AND "f_min_Hz" <= 1.7976931348623157e308), 
	CHECK ("f_max_Hz" > 0 AND "f_max_Hz" <= 1.7976931348623157e308), 
	CHECK (length(trim("operator")) > 0), 
	CHECK (length(trim("instrument")) > 0), 
	CHECK (length(trim("spectrum")) > 0), 
	CHECK (length(trim("spectrum_sha256")) > 0), 
	CHECK (length(spectrum_sha256) = 64), 
	CHECK (length(trim("note")) > 0), 
	CHECK (ended_by IS NULL OR ended_by > entry), 
	CHECK ("f_min_Hz" < "f_max_Hz"), 
	FOREIGN KEY(record) REFERENCES measurement (id), 
	FOREIGN KEY(cell) REFERENCES cell (id), 
	FOREIGN KEY(entry) REFERENCES journal (id), 
	FOREIGN KEY(ended_by) REFERENCES journal (id)
)
 STRICT

;
INSERT INTO "measurement" VALUES(1,1,1,'2026-03-11T09:00:00.000000Z',60,3.1,294.15,NULL,NULL,NULL,NULL,NULL,NULL,NULL,NULL,NULL,NULL,NULL,NULL,NULL,2,NULL);
INSERT INTO "measurement" VALUES(2,2,1,'2026-03-12T09:00:00.000000Z',60,3.2,295.15,NULL,NULL,NULL,NULL,NULL,NULL,NULL,NULL,NULL,NULL,NULL,NULL,NULL,2,6);
INSERT INTO "measurement" VALUES(3,3,1,'2026-03-13T09:00:00.000000Z',60,3.3,296.15,NULL,NULL,NULL,NULL,NULL,NULL,NULL,NULL,NULL,NULL,NULL,NULL,NULL,2,NULL);
INSERT INTO "measurement" VALUES(4,4,2,'2026-03-21T09:00:00.000000Z',60,3.1,294.15,NULL,NULL,NULL,NULL,NULL,NULL,NULL,NULL,NULL,NULL,NULL,NULL,NULL,2,7);
INSERT INTO "measurement" VALUES(5,5,2,'2026-03-22T09:00:00.000000Z',60,3.2,295.15,NULL,NULL,NULL,NULL,NULL,NULL,NULL,NULL,NULL,NULL,NULL,NULL,NULL,2,7);
INSERT INTO "measurement" VALUES(6,6,2,'2026-03-23T09:00:00.000000Z',60,3.3,296.15,NULL,NULL,NULL,NULL,NULL,NULL,NULL,NULL,NULL,NULL,NULL,NULL,NULL,2,7);
CREATE TABLE plateau (
	electrode INTEGER NOT NULL, 
	"low_V" REAL NOT NULL, 
	"high_V" REAL NOT NULL, 
	reference TEXT NOT NULL, 
	entry INTEGER NOT NULL, 
	ended_by INTEGER, 
	PRIMARY KEY (electrode, "low_V"), 
	CHECK ("low_V" >= -1.7976931348623157e308 AND "low_V" <= 1.7976931348623157e308), 
	CHECK ("high_V" >= -1.7976931348623157e308 AND "high_V" <= 1.7976931348623157e308), 
	CHECK (length(trim("reference")) > 0), 
	CHECK (ended_by IS NULL OR ended_by > entry), 
	CHECK ("low_V" < "high_V"), 
	FOREIGN KEY(electrode) REFERENCES electrode (id), 
	FOREIGN KEY(entry) REFERENCES journal (id), 
	FOREIGN KEY(ended_by) REFERENCES journal (id)
)
 WITHOUT ROWID,
 STRICT

;
CREATE TABLE quantity (
	name TEXT NOT NULL, 
	unit TEXT NOT NULL, 
	PRIMARY KEY (name), 
	CHECK (length(trim("unit")) > 0)
)
 STRICT

;
INSERT INTO "quantity" VALUES('R_el','ohm');
INSERT INTO "quantity" VALUES('R_sl','ohm');
INSERT INTO "quantity" VALUES('Q_sl','S s^n');
INSERT INTO "quantity" VALUES('n_sl','1');
INSERT INTO "quantity" VALUES('R_ct','ohm');
INSERT INTO "quantity" VALUES('Q_ct','S s^n');
INSERT INTO "quantity" VALUES('n_ct','1');
INSERT INTO "quantity" VALUES('R_lat','ohm');
INSERT INTO "quantity" VALUES('Q_lat','S s^n');
INSERT INTO "quantity" VALUES('n_lat','1');
INSERT INTO "quantity" VALUES('sigma_w','ohm s^-1/2');
CREATE TABLE schema_revision (
	version_num VARCHAR(32) NOT NULL, 
	CONSTRAINT schema_revision_pkc PRIMARY KEY (version_num)
);
INSERT INTO "schema_revision" VALUES('0001');
CREATE TABLE setting (
	id INTEGER NOT NULL, 
	record INTEGER NOT NULL, 
	name TEXT NOT NULL, 
	value TEXT NOT NULL, 
	entry INTEGER NOT NULL, 
	ended_by INTEGER, 
	PRIMARY KEY (id), 
	CHECK (id >= 1), 
	CHECK (record <= id), 
	CHECK (length(trim("name")) > 0), 
	CHECK (length(trim("value")) > 0), 
	CHECK (ended_by IS NULL OR ended_by > entry), 
	FOREIGN KEY(record) REFERENCES setting (id), 
	FOREIGN KEY(entry) REFERENCES journal (id), 
	FOREIGN KEY(ended_by) REFERENCES journal (id)
)
 STRICT

;
INSERT INTO "setting" VALUES(1,1,'zone','Europe/Paris',1,NULL);
CREATE TABLE species (
	id INTEGER NOT NULL, 
	record INTEGER NOT NULL, 
	name TEXT NOT NULL, 
	classes TEXT NOT NULL, 
	formula TEXT, 
	cation TEXT, 
	cations INTEGER, 
	molar_mass REAL, 
	donor_number REAL, 
	permittivity REAL, 
	"flash_point_C" REAL, 
	caution TEXT, 
	source TEXT, 
	entry INTEGER NOT NULL, 
	ended_by INTEGER, 
	PRIMARY KEY (id), 
	CHECK (id >= 1), 
	CHECK (record <= id), 
	CHECK (length(trim("name")) > 0), 
	CHECK (length(trim("classes")) > 0), 
	CHECK (length(trim("formula")) > 0), 
	CHECK (length(trim("cation")) > 0), 
	CHECK (cations >= 1), 
	CHECK ("molar_mass" > 0 AND "molar_mass" <= 1.7976931348623157e308), 
	CHECK ("donor_number" >= -1.7976931348623157e308 AND "donor_number" <= 1.7976931348623157e308), 
	CHECK ("permittivity" > 0 AND "permittivity" <= 1.7976931348623157e308), 
	CHECK ("flash_point_C" > -273.15 AND "flash_point_C" <= 1.7976931348623157e308), 
	CHECK (length(trim("caution")) > 0), 
	CHECK (length(trim("source")) > 0), 
	CHECK (ended_by IS NULL OR ended_by > entry), 
	FOREIGN KEY(record) REFERENCES species (id), 
	FOREIGN KEY(entry) REFERENCES journal (id), 
	FOREIGN KEY(ended_by) REFERENCES journal (id)
)
 STRICT

;
CREATE INDEX cell_by_electrode ON cell (electrode);
CREATE INDEX cell_by_electrolyte ON cell (electrolyte);
CREATE INDEX cell_by_specimen ON cell (specimen);
CREATE INDEX fit_by_measurement ON fit (measurement);
CREATE INDEX measurement_by_cell ON measurement (cell, measured_at);
CREATE TRIGGER journal_chained BEFORE INSERT ON journal BEGIN
SELECT RAISE(ABORT, 'journal: entries are numbered without a gap') WHERE NEW.id IS NOT (SELECT coalesce(max(id), 0) + 1 FROM journal);
SELECT RAISE(ABORT, 'journal: an entry carries the hash of the one before it') WHERE NEW.previous IS NOT coalesce((SELECT hash FROM journal ORDER BY id DESC LIMIT 1), '0000000000000000000000000000000000000000000000000000000000000000');
END;
CREATE TRIGGER journal_kept BEFORE UPDATE ON journal BEGIN
SELECT RAISE(ABORT, 'journal: entries are never changed') WHERE 1;
END;
CREATE TRIGGER journal_never_deleted BEFORE DELETE ON journal BEGIN
SELECT RAISE(ABORT, 'journal: entries are never deleted') WHERE 1;
END;
CREATE TRIGGER imported_file_made BEFORE INSERT ON "imported_file" BEGIN
SELECT RAISE(ABORT, 'imported_file: a row is made by the latest journal entry only') WHERE NEW.entry IS NOT (SELECT max(id) FROM journal);
SELECT RAISE(ABORT, 'imported_file: a row is not born ended') WHERE NEW.ended_by IS NOT NULL;
SELECT RAISE(ABORT, 'imported_file: that row exists already and rows are never replaced') WHERE EXISTS (SELECT 1 FROM "imported_file" WHERE "id" = NEW."id");
END;
CREATE TRIGGER imported_file_kept BEFORE UPDATE ON "imported_file" WHEN NOT (OLD.ended_by IS NULL AND NEW.ended_by IS (SELECT max(id) FROM journal) AND NEW.ended_by > OLD.entry AND NEW."id" IS OLD."id" AND NEW."name" IS OLD."name" AND NEW."sha256" IS OLD."sha256" AND NEW."row_count" IS OLD."row_count" AND NEW."entry" IS OLD."entry") BEGIN
SELECT RAISE(ABORT, 'imported_file: rows are append-only; a row can be ended once and nothing else') WHERE 1;
END;
CREATE TRIGGER imported_file_never_deleted BEFORE DELETE ON "imported_file" BEGIN
SELECT RAISE(ABORT, 'imported_file: rows are never deleted; withdraw instead') WHERE 1;
END;
CREATE TRIGGER setting_made BEFORE INSERT ON "setting" BEGIN
SELECT RAISE(ABORT, 'setting: a row is made by the latest journal entry only') WHERE NEW.entry IS NOT (SELECT max(id) FROM journal);
SELECT RAISE(ABORT, 'setting: a row is not born ended') WHERE NEW.ended_by IS NOT NULL;
SELECT RAISE(ABORT, 'setting: that row exists already and rows are never replaced') WHERE EXISTS (SELECT 1 FROM "setting" WHERE "id" = NEW."id");
SELECT RAISE(ABORT, 'setting: a record number is the id of the first row of that record') WHERE NEW.record <> NEW.id AND NOT EXISTS (SELECT 1 FROM "setting" WHERE id = NEW.record AND record = NEW.record);
SELECT RAISE(ABORT, 'setting: only one row in force may carry the same name') WHERE EXISTS (SELECT 1 FROM "setting" WHERE "name" = NEW."name" AND ended_by IS NULL);
SELECT RAISE(ABORT, 'setting: only one row in force may carry the same record') WHERE EXISTS (SELECT 1 FROM "setting" WHERE "record" = NEW."record" AND ended_by IS NULL);
END;
CREATE TRIGGER setting_kept BEFORE UPDATE ON "setting" WHEN NOT (OLD.ended_by IS NULL AND NEW.ended_by IS (SELECT max(id) FROM journal) AND NEW.ended_by > OLD.entry AND NEW."id" IS OLD."id" AND NEW."record" IS OLD."record" AND NEW."name" IS OLD."name" AND NEW."value" IS OLD."value" AND NEW."entry" IS OLD."entry") BEGIN
SELECT RAISE(ABORT, 'setting: rows are append-only; a row can be ended once and nothing else') WHERE 1;
END;
CREATE TRIGGER setting_never_deleted BEFORE DELETE ON "setting" BEGIN
SELECT RAISE(ABORT, 'setting: rows are never deleted; withdraw instead') WHERE 1;
END;
CREATE UNIQUE INDEX setting_one_name ON "setting" ("name") WHERE ended_by IS NULL;
CREATE UNIQUE INDEX setting_one_record ON "setting" ("record") WHERE ended_by IS NULL;
CREATE TRIGGER criterion_made BEFORE INSERT ON "criterion" BEGIN
SELECT RAISE(ABORT, 'criterion: a row is made by the latest journal entry only') WHERE NEW.entry IS NOT (SELECT max(id) FROM journal);
SELECT RAISE(ABORT, 'criterion: a row is not born ended') WHERE NEW.ended_by IS NOT NULL;
SELECT RAISE(ABORT, 'criterion: that row exists already and rows are never replaced') WHERE EXISTS (SELECT 1 FROM "criterion" WHERE "id" = NEW."id");
SELECT RAISE(ABORT, 'criterion: a record number is the id of the first row of that record') WHERE NEW.record <> NEW.id AND NOT EXISTS (SELECT 1 FROM "criterion" WHERE id = NEW.record AND record = NEW.record);
SELECT RAISE(ABORT, 'criterion: only one row in force may carry the same name') WHERE EXISTS (SELECT 1 FROM "criterion" WHERE "name" = NEW."name" AND ended_by IS NULL);
SELECT RAISE(ABORT, 'criterion: only one row in force may carry the same record') WHERE EXISTS (SELECT 1 FROM "criterion" WHERE "record" = NEW."record" AND ended_by IS NULL);
END;
CREATE TRIGGER criterion_kept BEFORE UPDATE ON "criterion" WHEN NOT (OLD.ended_by IS NULL AND NEW.ended_by IS (SELECT max(id) FROM journal) AND NEW.ended_by > OLD.entry AND NEW."id" IS OLD."id" AND NEW."record" IS OLD."record" AND NEW."name" IS OLD."name" AND NEW."value" IS OLD."value" AND NEW."entry" IS OLD."entry") BEGIN
SELECT RAISE(ABORT, 'criterion: rows are append-only; a row can be ended once and nothing else') WHERE 1;
END;
CREATE TRIGGER criterion_never_deleted BEFORE DELETE ON "criterion" BEGIN
SELECT RAISE(ABORT, 'criterion: rows are never deleted; withdraw instead') WHERE 1;
END;
CREATE UNIQUE INDEX criterion_one_name ON "criterion" ("name") WHERE ended_by IS NULL;
CREATE UNIQUE INDEX criterion_one_record ON "criterion" ("record") WHERE ended_by IS NULL;
CREATE TRIGGER cost_made BEFORE INSERT ON "cost" BEGIN
SELECT RAISE(ABORT, 'cost: a row is made by the latest journal entry only') WHERE NEW.entry IS NOT (SELECT max(id) FROM journal);
SELECT RAISE(ABORT, 'cost: a row is not born ended') WHERE NEW.ended_by IS NOT NULL;
SELECT RAISE(ABORT, 'cost: that row exists already and rows are never replaced') WHERE EXISTS (SELECT 1 FROM "cost" WHERE "id" = NEW."id");
SELECT RAISE(ABORT, 'cost: a record number is the id of the first row of that record') WHERE NEW.record <> NEW.id AND NOT EXISTS (SELECT 1 FROM "cost" WHERE id = NEW.record AND record = NEW.record);
SELECT RAISE(ABORT, 'cost: only one row in force may carry the same name') WHERE EXISTS (SELECT 1 FROM "cost" WHERE "name" = NEW."name" AND ended_by IS NULL);
SELECT RAISE(ABORT, 'cost: only one row in force may carry the same record') WHERE EXISTS (SELECT 1 FROM "cost" WHERE "record" = NEW."record" AND ended_by IS NULL);
END;
CREATE TRIGGER cost_kept BEFORE UPDATE ON "cost" WHEN NOT (OLD.ended_by IS NULL AND NEW.ended_by IS (SELECT max(id) FROM journal) AND NEW.ended_by > OLD.entry AND NEW."id" IS OLD."id" AND NEW."record" IS OLD."record" AND NEW."name" IS OLD."name" AND NEW."hours" IS OLD."hours" AND NEW."entry" IS OLD."entry") BEGIN
SELECT RAISE(ABORT, 'cost: rows are append-only; a row can be ended once and nothing else') WHERE 1;
END;
CREATE TRIGGER cost_never_deleted BEFORE DELETE ON "cost" BEGIN
SELECT RAISE(ABORT, 'cost: rows are never deleted; withdraw instead') WHERE 1;
END;
CREATE UNIQUE INDEX cost_one_name ON "cost" ("name") WHERE ended_by IS NULL;
CREATE UNIQUE INDEX cost_one_record ON "cost" ("record") WHERE ended_by IS NULL;
CREATE TRIGGER species_made BEFORE INSERT ON "species" BEGIN
SELECT RAISE(ABORT, 'species: a row is made by the latest journal entry only') WHERE NEW.entry IS NOT (SELECT max(id) FROM journal);
SELECT RAISE(ABORT, 'species: a row is not born ended') WHERE NEW.ended_by IS NOT NULL;
SELECT RAISE(ABORT, 'species: that row exists already and rows are never replaced') WHERE EXISTS (SELECT 1 FROM "species" WHERE "id" = NEW."id");
SELECT RAISE(ABORT, 'species: a record number is the id of the first row of that record') WHERE NEW.record <> NEW.id AND NOT EXISTS (SELECT 1 FROM "species" WHERE id = NEW.record AND record = NEW.record);
SELECT RAISE(ABORT, 'species: only one row in force may carry the same name') WHERE EXISTS (SELECT 1 FROM "species" WHERE "name" = NEW."name" AND ended_by IS NULL);
SELECT RAISE(ABORT, 'species: only one row in force may carry the same record') WHERE EXISTS (SELECT 1 FROM "species" WHERE "record" = NEW."record" AND ended_by IS NULL);
END;
CREATE TRIGGER species_kept BEFORE UPDATE ON "species" WHEN NOT (OLD.ended_by IS NULL AND NEW.ended_by IS (SELECT max(id) FROM journal) AND NEW.ended_by > OLD.entry AND NEW."id" IS OLD."id" AND NEW."record" IS OLD."record" AND NEW."name" IS OLD."name" AND NEW."classes" IS OLD."classes" AND NEW."formula" IS OLD."formula" AND NEW."cation" IS OLD."cation" AND NEW."cations" IS OLD."cations" AND NEW."molar_mass" IS OLD."molar_mass" AND NEW."donor_number" IS OLD."donor_number" AND NEW."permittivity" IS OLD."permittivity" AND NEW."flash_point_C" IS OLD."flash_point_C" AND NEW."caution" IS OLD."caution" AND NEW."source" IS OLD."source" AND NEW."entry" IS OLD."entry") BEGIN
SELECT RAISE(ABORT, 'species: rows are append-only; a row can be ended once and nothing else') WHERE 1;
END;
CREATE TRIGGER species_never_deleted BEFORE DELETE ON "species" BEGIN
SELECT RAISE(ABORT, 'species: rows are never deleted; withdraw instead') WHERE 1;
END;
CREATE UNIQUE INDEX species_one_name ON "species" ("name") WHERE ended_by IS NULL;
CREATE UNIQUE INDEX species_one_record ON "species" ("record") WHERE ended_by IS NULL;
CREATE TRIGGER electrolyte_made BEFORE INSERT ON "electrolyte" BEGIN
SELECT RAISE(ABORT, 'electrolyte: a row is made by the latest journal entry only') WHERE NEW.entry IS NOT (SELECT max(id) FROM journal);
SELECT RAISE(ABORT, 'electrolyte: a row is not born ended') WHERE NEW.ended_by IS NOT NULL;
SELECT RAISE(ABORT, 'electrolyte: that row exists already and rows are never replaced') WHERE EXISTS (SELECT 1 FROM "electrolyte" WHERE "id" = NEW."id");
SELECT RAISE(ABORT, 'electrolyte: a record number is the id of the first row of that record') WHERE NEW.record <> NEW.id AND NOT EXISTS (SELECT 1 FROM "electrolyte" WHERE id = NEW.record AND record = NEW.record);
SELECT RAISE(ABORT, 'electrolyte: only one row in force may carry the same key') WHERE EXISTS (SELECT 1 FROM "electrolyte" WHERE "key" = NEW."key" AND ended_by IS NULL);
SELECT RAISE(ABORT, 'electrolyte: only one row in force may carry the same record') WHERE EXISTS (SELECT 1 FROM "electrolyte" WHERE "record" = NEW."record" AND ended_by IS NULL);
END;
CREATE TRIGGER electrolyte_kept BEFORE UPDATE ON "electrolyte" WHEN NOT (OLD.ended_by IS NULL AND NEW.ended_by IS (SELECT max(id) FROM journal) AND NEW.ended_by > OLD.entry AND NEW."id" IS OLD."id" AND NEW."record" IS OLD."record" AND NEW."key" IS OLD."key" AND NEW."written" IS OLD."written" AND NEW."salt_key" IS OLD."salt_key" AND NEW."solvent_key" IS OLD."solvent_key" AND NEW."additive_key" IS OLD."additive_key" AND NEW."basis" IS OLD."basis" AND NEW."aqueous" IS OLD."aqueous" AND NEW."density_g_cm3" IS OLD."density_g_cm3" AND NEW."minimum_temperature_K" IS OLD."minimum_temperature_K" AND NEW."maximum_temperature_K" IS OLD."maximum_temperature_K" AND NEW."note" IS OLD."note" AND NEW."entry" IS OLD."entry") BEGIN
SELECT RAISE(ABORT, 'electrolyte: rows are append-only; a row can be ended once and nothing else') WHERE 1;
END;
CREATE TRIGGER electrolyte_never_deleted BEFORE DELETE ON "electrolyte" BEGIN
SELECT RAISE(ABORT, 'electrolyte: rows are never deleted; withdraw instead') WHERE 1;
END;
CREATE UNIQUE INDEX electrolyte_one_key ON "electrolyte" ("key") WHERE ended_by IS NULL;
CREATE UNIQUE INDEX electrolyte_one_record ON "electrolyte" ("record") WHERE ended_by IS NULL;
CREATE TRIGGER electrolyte_component_made BEFORE INSERT ON "electrolyte_component" BEGIN
SELECT RAISE(ABORT, 'electrolyte_component: a row is made by the latest journal entry only') WHERE NEW.entry IS NOT (SELECT max(id) FROM journal);
SELECT RAISE(ABORT, 'electrolyte_component: a row is not born ended') WHERE NEW.ended_by IS NOT NULL;
SELECT RAISE(ABORT, 'electrolyte_component: that row exists already and rows are never replaced') WHERE EXISTS (SELECT 1 FROM "electrolyte_component" WHERE "electrolyte" = NEW."electrolyte" AND "position" = NEW."position");
END;
CREATE TRIGGER electrolyte_component_kept BEFORE UPDATE ON "electrolyte_component" WHEN NOT (OLD.ended_by IS NULL AND NEW.ended_by IS (SELECT max(id) FROM journal) AND NEW.ended_by > OLD.entry AND NEW."electrolyte" IS OLD."electrolyte" AND NEW."position" IS OLD."position" AND NEW."role" IS OLD."role" AND NEW."species" IS OLD."species" AND NEW."amount" IS OLD."amount" AND NEW."basis" IS OLD."basis" AND NEW."entry" IS OLD."entry") BEGIN
SELECT RAISE(ABORT, 'electrolyte_component: rows are append-only; a row can be ended once and nothing else') WHERE 1;
END;
CREATE TRIGGER electrolyte_component_never_deleted BEFORE DELETE ON "electrolyte_component" BEGIN
SELECT RAISE(ABORT, 'electrolyte_component: rows are never deleted; withdraw instead') WHERE 1;
END;
CREATE TRIGGER electrolyte_property_made BEFORE INSERT ON "electrolyte_property" BEGIN
SELECT RAISE(ABORT, 'electrolyte_property: a row is made by the latest journal entry only') WHERE NEW.entry IS NOT (SELECT max(id) FROM journal);
SELECT RAISE(ABORT, 'electrolyte_property: a row is not born ended') WHERE NEW.ended_by IS NOT NULL;
SELECT RAISE(ABORT, 'electrolyte_property: that row exists already and rows are never replaced') WHERE EXISTS (SELECT 1 FROM "electrolyte_property" WHERE "electrolyte" = NEW."electrolyte" AND "property" = NEW."property" AND "temperature_K" = NEW."temperature_K");
END;
CREATE TRIGGER electrolyte_property_kept BEFORE UPDATE ON "electrolyte_property" WHEN NOT (OLD.ended_by IS NULL AND NEW.ended_by IS (SELECT max(id) FROM journal) AND NEW.ended_by > OLD.entry AND NEW."electrolyte" IS OLD."electrolyte" AND NEW."property" IS OLD."property" AND NEW."temperature_K" IS OLD."temperature_K" AND NEW."value" IS OLD."value" AND NEW."entry" IS OLD."entry") BEGIN
SELECT RAISE(ABORT, 'electrolyte_property: rows are append-only; a row can be ended once and nothing else') WHERE 1;
END;
CREATE TRIGGER electrolyte_property_never_deleted BEFORE DELETE ON "electrolyte_property" BEGIN
SELECT RAISE(ABORT, 'electrolyte_property: rows are never deleted; withdraw instead') WHERE 1;
END;
CREATE TRIGGER electrode_made BEFORE INSERT ON "electrode" BEGIN
SELECT RAISE(ABORT, 'electrode: a row is made by the latest journal entry only') WHERE NEW.entry IS NOT (SELECT max(id) FROM journal);
SELECT RAISE(ABORT, 'electrode: a row is not born ended') WHERE NEW.ended_by IS NOT NULL;
SELECT RAISE(ABORT, 'electrode: that row exists already and rows are never replaced') WHERE EXISTS (SELECT 1 FROM "electrode" WHERE "id" = NEW."id");
SELECT RAISE(ABORT, 'electrode: a record number is the id of the first row of that record') WHERE NEW.record <> NEW.id AND NOT EXISTS (SELECT 1 FROM "electrode" WHERE id = NEW.record AND record = NEW.record);
SELECT RAISE(ABORT, 'electrode: only one row in force may carry the same label') WHERE EXISTS (SELECT 1 FROM "electrode" WHERE "label" = NEW."label" AND ended_by IS NULL);
SELECT RAISE(ABORT, 'electrode: only one row in force may carry the same record') WHERE EXISTS (SELECT 1 FROM "electrode" WHERE "record" = NEW."record" AND ended_by IS NULL);
SELECT RAISE(ABORT, 'electrode: the electrolyte it belongs to is not in force') WHERE NEW."pore_electrolyte" IS NOT NULL AND NOT EXISTS (SELECT 1 FROM "electrolyte" WHERE record = NEW."pore_electrolyte" AND ended_by IS NULL);
END;
CREATE TRIGGER electrode_kept BEFORE UPDATE ON "electrode" WHEN NOT (OLD.ended_by IS NULL AND NEW.ended_by IS (SELECT max(id) FROM journal) AND NEW.ended_by > OLD.entry AND NEW."id" IS OLD."id" AND NEW."record" IS OLD."record" AND NEW."label" IS OLD."label" AND NEW."material" IS OLD."material" AND NEW."ion" IS OLD."ion" AND NEW."charge" IS OLD."charge" AND NEW."form" IS OLD."form" AND NEW."diffusion_length_cm" IS OLD."diffusion_length_cm" AND NEW."diffusivity_cm2_s" IS OLD."diffusivity_cm2_s" AND NEW."porosity" IS OLD."porosity" AND NEW."pore_resistance_ohm_cm2" IS OLD."pore_resistance_ohm_cm2" AND NEW."pore_electrolyte" IS OLD."pore_electrolyte" AND NEW."pore_temperature_K" IS OLD."pore_temperature_K" AND NEW."window_low_V" IS OLD."window_low_V" AND NEW."window_high_V" IS OLD."window_high_V" AND NEW."window_reference" IS OLD."window_reference" AND NEW."maximum_temperature_K" IS OLD."maximum_temperature_K" AND NEW."note" IS OLD."note" AND NEW."entry" IS OLD."entry") BEGIN
SELECT RAISE(ABORT, 'electrode: rows are append-only; a row can be ended once and nothing else') WHERE 1;
END;
CREATE TRIGGER electrode_never_deleted BEFORE DELETE ON "electrode" BEGIN
SELECT RAISE(ABORT, 'electrode: rows are never deleted; withdraw instead') WHERE 1;
END;
CREATE UNIQUE INDEX electrode_one_label ON "electrode" ("label") WHERE ended_by IS NULL;
CREATE UNIQUE INDEX electrode_one_record ON "electrode" ("record") WHERE ended_by IS NULL;
CREATE TRIGGER plateau_made BEFORE INSERT ON "plateau" BEGIN
SELECT RAISE(ABORT, 'plateau: a row is made by the latest journal entry only') WHERE NEW.entry IS NOT (SELECT max(id) FROM journal);
SELECT RAISE(ABORT, 'plateau: a row is not born ended') WHERE NEW.ended_by IS NOT NULL;
SELECT RAISE(ABORT, 'plateau: that row exists already and rows are never replaced') WHERE EXISTS (SELECT 1 FROM "plateau" WHERE "electrode" = NEW."electrode" AND "low_V" = NEW."low_V");
END;
CREATE TRIGGER plateau_kept BEFORE UPDATE ON "plateau" WHEN NOT (OLD.ended_by IS NULL AND NEW.ended_by IS (SELECT max(id) FROM journal) AND NEW.ended_by > OLD.entry AND NEW."electrode" IS OLD."electrode" AND NEW."low_V" IS OLD."low_V" AND NEW."high_V" IS OLD."high_V" AND NEW."reference" IS OLD."reference" AND NEW."entry" IS OLD."entry") BEGIN
SELECT RAISE(ABORT, 'plateau: rows are append-only; a row can be ended once and nothing else') WHERE 1;
END;
CREATE TRIGGER plateau_never_deleted BEFORE DELETE ON "plateau" BEGIN
SELECT RAISE(ABORT, 'plateau: rows are never deleted; withdraw instead') WHERE 1;
END;
CREATE TRIGGER cell_made BEFORE INSERT ON "cell" BEGIN
SELECT RAISE(ABORT, 'cell: a row is made by the latest journal entry only') WHERE NEW.entry IS NOT (SELECT max(id) FROM journal);
SELECT RAISE(ABORT, 'cell: a row is not born ended') WHERE NEW.ended_by IS NOT NULL;
SELECT RAISE(ABORT, 'cell: that row exists already and rows are never replaced') WHERE EXISTS (SELECT 1 FROM "cell" WHERE "id" = NEW."id");
SELECT RAISE(ABORT, 'cell: a record number is the id of the first row of that record') WHERE NEW.record <> NEW.id AND NOT EXISTS (SELECT 1 FROM "cell" WHERE id = NEW.record AND record = NEW.record);
SELECT RAISE(ABORT, 'cell: only one row in force may carry the same label') WHERE EXISTS (SELECT 1 FROM "cell" WHERE "label" = NEW."label" AND ended_by IS NULL);
SELECT RAISE(ABORT, 'cell: only one row in force may carry the same record') WHERE EXISTS (SELECT 1 FROM "cell" WHERE "record" = NEW."record" AND ended_by IS NULL);
SELECT RAISE(ABORT, 'cell: the electrode it belongs to is not in force') WHERE NEW."electrode" IS NOT NULL AND NOT EXISTS (SELECT 1 FROM "electrode" WHERE record = NEW."electrode" AND ended_by IS NULL);
SELECT RAISE(ABORT, 'cell: the electrolyte it belongs to is not in force') WHERE NEW."electrolyte" IS NOT NULL AND NOT EXISTS (SELECT 1 FROM "electrolyte" WHERE record = NEW."electrolyte" AND ended_by IS NULL);
END;
CREATE TRIGGER cell_kept BEFORE UPDATE ON "cell" WHEN NOT (OLD.ended_by IS NULL AND NEW.ended_by IS (SELECT max(id) FROM journal) AND NEW.ended_by > OLD.entry AND NEW."id" IS OLD."id" AND NEW."record" IS OLD."record" AND NEW."label" IS OLD."label" AND NEW."electrode" IS OLD."electrode" AND NEW."electrolyte" IS OLD."electrolyte" AND NEW."specimen" IS OLD."specimen" AND NEW."area_cm2" IS OLD."area_cm2" AND NEW."configuration" IS OLD."configuration" AND NEW."reference" IS OLD."reference" AND NEW."assembled_at" IS OLD."assembled_at" AND NEW."assembled_offset" IS OLD."assembled_offset" AND NEW."operator" IS OLD."operator" AND NEW."note" IS OLD."note" AND NEW."entry" IS OLD."entry") BEGIN
SELECT RAISE(ABORT, 'cell: rows are append-only; a row can be ended once and nothing else') WHERE 1;
END;
CREATE TRIGGER cell_never_deleted BEFORE DELETE ON "cell" BEGIN
SELECT RAISE(ABORT, 'cell: rows are never deleted; withdraw instead') WHERE 1;
END;
CREATE UNIQUE INDEX cell_one_label ON "cell" ("label") WHERE ended_by IS NULL;
CREATE UNIQUE INDEX cell_one_record ON "cell" ("record") WHERE ended_by IS NULL;
CREATE TRIGGER measurement_made BEFORE INSERT ON "measurement" BEGIN
SELECT RAISE(ABORT, 'measurement: a row is made by the latest journal entry only') WHERE NEW.entry IS NOT (SELECT max(id) FROM journal);
SELECT RAISE(ABORT, 'measurement: a row is not born ended') WHERE NEW.ended_by IS NOT NULL;
SELECT RAISE(ABORT, 'measurement: that row exists already and rows are never replaced') WHERE EXISTS (SELECT 1 FROM "measurement" WHERE "id" = NEW."id");
SELECT RAISE(ABORT, 'measurement: a record number is the id of the first row of that record') WHERE NEW.record <> NEW.id AND NOT EXISTS (SELECT 1 FROM "measurement" WHERE id = NEW.record AND record = NEW.record);
SELECT RAISE(ABORT, 'measurement: only one row in force may carry the same cell and measured_at') WHERE EXISTS (SELECT 1 FROM "measurement" WHERE "cell" = NEW."cell" AND "measured_at" = NEW."measured_at" AND ended_by IS NULL);
SELECT RAISE(ABORT, 'measurement: only one row in force may carry the same record') WHERE EXISTS (SELECT 1 FROM "measurement" WHERE "record" = NEW."record" AND ended_by IS NULL);
SELECT RAISE(ABORT, 'measurement: the cell it belongs to is not in force') WHERE NEW."cell" IS NOT NULL AND NOT EXISTS (SELECT 1 FROM "cell" WHERE record = NEW."cell" AND ended_by IS NULL);
END;
CREATE TRIGGER measurement_kept BEFORE UPDATE ON "measurement" WHEN NOT (OLD.ended_by IS NULL AND NEW.ended_by IS (SELECT max(id) FROM journal) AND NEW.ended_by > OLD.entry AND NEW."id" IS OLD."id" AND NEW."record" IS OLD."record" AND NEW."cell" IS OLD."cell" AND NEW."measured_at" IS OLD."measured_at" AND NEW."measured_offset" IS OLD."measured_offset" AND NEW."potential_V" IS OLD."potential_V" AND NEW."temperature_K" IS OLD."temperature_K" AND NEW."ion_content" IS OLD."ion_content" AND NEW."E_half_V" IS OLD."E_half_V" AND NEW."cycle" IS OLD."cycle" AND NEW."direction" IS OLD."direction" AND NEW."rest_h" IS OLD."rest_h" AND NEW."amplitude_mV" IS OLD."amplitude_mV" AND NEW."f_min_Hz" IS OLD."f_min_Hz" AND NEW."f_max_Hz" IS OLD."f_max_Hz" AND NEW."operator" IS OLD."operator" AND NEW."instrument" IS OLD."instrument" AND NEW."spectrum" IS OLD."spectrum" AND NEW."spectrum_sha256" IS OLD."spectrum_sha256" AND NEW."note" IS OLD."note" AND NEW."entry" IS OLD."entry") BEGIN
SELECT RAISE(ABORT, 'measurement: rows are append-only; a row can be ended once and nothing else') WHERE 1;
END;
CREATE TRIGGER measurement_never_deleted BEFORE DELETE ON "measurement" BEGIN
SELECT RAISE(ABORT, 'measurement: rows are never deleted; withdraw instead') WHERE 1;
END;
CREATE UNIQUE INDEX measurement_one_cell_measured_at ON "measurement" ("cell", "measured_at") WHERE ended_by IS NULL;
CREATE UNIQUE INDEX measurement_one_record ON "measurement" ("record") WHERE ended_by IS NULL;
CREATE TRIGGER fit_made BEFORE INSERT ON "fit" BEGIN
SELECT RAISE(ABORT, 'fit: a row is made by the latest journal entry only') WHERE NEW.entry IS NOT (SELECT max(id) FROM journal);
SELECT RAISE(ABORT, 'fit: a row is not born ended') WHERE NEW.ended_by IS NOT NULL;
SELECT RAISE(ABORT, 'fit: that row exists already and rows are never replaced') WHERE EXISTS (SELECT 1 FROM "fit" WHERE "id" = NEW."id");
SELECT RAISE(ABORT, 'fit: a record number is the id of the first row of that record') WHERE NEW.record <> NEW.id AND NOT EXISTS (SELECT 1 FROM "fit" WHERE id = NEW.record AND record = NEW.record);
SELECT RAISE(ABORT, 'fit: only one row in force may carry the same measurement') WHERE EXISTS (SELECT 1 FROM "fit" WHERE "measurement" = NEW."measurement" AND ended_by IS NULL);
SELECT RAISE(ABORT, 'fit: only one row in force may carry the same record') WHERE EXISTS (SELECT 1 FROM "fit" WHERE "record" = NEW."record" AND ended_by IS NULL);
SELECT RAISE(ABORT, 'fit: the measurement it belongs to is not in force') WHERE NEW."measurement" IS NOT NULL AND NOT EXISTS (SELECT 1 FROM "measurement" WHERE record = NEW."measurement" AND ended_by IS NULL);
END;
CREATE TRIGGER fit_kept BEFORE UPDATE ON "fit" WHEN NOT (OLD.ended_by IS NULL AND NEW.ended_by IS (SELECT max(id) FROM journal) AND NEW.ended_by > OLD.entry AND NEW."id" IS OLD."id" AND NEW."record" IS OLD."record" AND NEW."measurement" IS OLD."measurement" AND NEW."fitted_at" IS OLD."fitted_at" AND NEW."fitted_offset" IS OLD."fitted_offset" AND NEW."fitted_by" IS OLD."fitted_by" AND NEW."circuit" IS OLD."circuit" AND NEW."weighting" IS OLD."weighting" AND NEW."chi2" IS OLD."chi2" AND NEW."entry" IS OLD."entry") BEGIN
SELECT RAISE(ABORT, 'fit: rows are append-only; a row can be ended once and nothing else') WHERE 1;
END;
CREATE TRIGGER fit_never_deleted BEFORE DELETE ON "fit" BEGIN
SELECT RAISE(ABORT, 'fit: rows are never deleted; withdraw instead') WHERE 1;
END;
CREATE UNIQUE INDEX fit_one_measurement ON "fit" ("measurement") WHERE ended_by IS NULL;
CREATE UNIQUE INDEX fit_one_record ON "fit" ("record") WHERE ended_by IS NULL;
CREATE TRIGGER fitted_value_made BEFORE INSERT ON "fitted_value" BEGIN
SELECT RAISE(ABORT, 'fitted_value: a row is made by the latest journal entry only') WHERE NEW.entry IS NOT (SELECT max(id) FROM journal);
SELECT RAISE(ABORT, 'fitted_value: a row is not born ended') WHERE NEW.ended_by IS NOT NULL;
SELECT RAISE(ABORT, 'fitted_value: that row exists already and rows are never replaced') WHERE EXISTS (SELECT 1 FROM "fitted_value" WHERE "fit" = NEW."fit" AND "quantity" = NEW."quantity");
END;
CREATE TRIGGER fitted_value_kept BEFORE UPDATE ON "fitted_value" WHEN NOT (OLD.ended_by IS NULL AND NEW.ended_by IS (SELECT max(id) FROM journal) AND NEW.ended_by > OLD.entry AND NEW."fit" IS OLD."fit" AND NEW."quantity" IS OLD."quantity" AND NEW."value" IS OLD."value" AND NEW."se" IS OLD."se" AND NEW."entry" IS OLD."entry") BEGIN
SELECT RAISE(ABORT, 'fitted_value: rows are append-only; a row can be ended once and nothing else') WHERE 1;
END;
CREATE TRIGGER fitted_value_never_deleted BEFORE DELETE ON "fitted_value" BEGIN
SELECT RAISE(ABORT, 'fitted_value: rows are never deleted; withdraw instead') WHERE 1;
END;
CREATE TRIGGER electrolyte_blend_whole BEFORE INSERT ON electrolyte BEGIN SELECT RAISE(ABORT, 'electrolyte: the fractions of the solvents sum to 1') WHERE abs((SELECT coalesce(sum(amount), 0) FROM electrolyte_component WHERE electrolyte = NEW.id AND role = 'solvent') - 1) > 1e-9; END;
CREATE TRIGGER electrolyte_salt_stated BEFORE INSERT ON electrolyte BEGIN SELECT RAISE(ABORT, 'electrolyte: a recipe names at least one salt') WHERE NOT EXISTS (SELECT 1 FROM electrolyte_component WHERE electrolyte = NEW.id AND role = 'salt'); END;
CREATE TRIGGER electrolyte_component_first BEFORE INSERT ON electrolyte_component BEGIN SELECT RAISE(ABORT, 'electrolyte_component: a recipe that stands takes no more components') WHERE EXISTS (SELECT 1 FROM electrolyte WHERE id = NEW.electrolyte); END;
CREATE TRIGGER electrolyte_property_with_row BEFORE INSERT ON electrolyte_property BEGIN SELECT RAISE(ABORT, 'electrolyte_property: it is made with its electrolyte row') WHERE NOT EXISTS (SELECT 1 FROM electrolyte WHERE id = NEW.electrolyte AND entry = NEW.entry); END;
CREATE TRIGGER plateau_with_row BEFORE INSERT ON plateau BEGIN SELECT RAISE(ABORT, 'plateau: it is made with its electrode row') WHERE NOT EXISTS (SELECT 1 FROM electrode WHERE id = NEW.electrode AND entry = NEW.entry); END;
CREATE TRIGGER fitted_value_with_row BEFORE INSERT ON fitted_value BEGIN SELECT RAISE(ABORT, 'fitted_value: it is made with its fit') WHERE NOT EXISTS (SELECT 1 FROM fit WHERE id = NEW.fit AND entry = NEW.entry); END;
CREATE TRIGGER cell_specimen_of_one_electrode BEFORE INSERT ON cell BEGIN SELECT RAISE(ABORT, 'cell: a specimen belongs to one electrode') WHERE EXISTS (SELECT 1 FROM cell WHERE specimen = NEW.specimen AND ended_by IS NULL AND record <> NEW.record AND electrode <> NEW.electrode); END;
CREATE TRIGGER measurement_potential_stated BEFORE INSERT ON measurement BEGIN SELECT RAISE(ABORT, 'measurement: only a symmetric cell may leave its potential empty') WHERE NEW."potential_V" IS NULL AND NOT EXISTS (SELECT 1 FROM cell WHERE record = NEW.cell AND ended_by IS NULL AND configuration = 'symmetric'); END;
CREATE TRIGGER quantity_fixed_insert BEFORE INSERT ON quantity BEGIN SELECT RAISE(ABORT, 'quantity: changed by migrations only'); END;
CREATE TRIGGER quantity_fixed_update BEFORE UPDATE ON quantity BEGIN SELECT RAISE(ABORT, 'quantity: changed by migrations only'); END;
CREATE TRIGGER quantity_fixed_delete BEFORE DELETE ON quantity BEGIN SELECT RAISE(ABORT, 'quantity: changed by migrations only'); END;
COMMIT;
