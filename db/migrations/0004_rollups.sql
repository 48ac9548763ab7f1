CREATE TABLE "reading_rollups" (
	"start" timestamp with time zone NOT NULL,
	"sensor_id" integer NOT NULL,
	"resolution_s" integer NOT NULL,
	"lowest_ppm" real NOT NULL,
	"mean_ppm" real NOT NULL,
	"highest_ppm" real NOT NULL,
	"count" integer NOT NULL,
	CONSTRAINT "reading_rollups_sensor_id_resolution_s_start_pk" PRIMARY KEY("sensor_id","resolution_s","start")
) PARTITION BY LIST ("resolution_s");
--> statement-breakpoint
CREATE TABLE "rollup_hours" (
	"building_id" integer NOT NULL,
	"hour" timestamp with time zone NOT NULL,
	CONSTRAINT "rollup_hours_building_id_hour_pk" PRIMARY KEY("building_id","hour")
);
--> statement-breakpoint
CREATE TABLE "rollup_progress" (
	"building_id" integer PRIMARY KEY NOT NULL,
	"rolled_to" timestamp with time zone NOT NULL
);
--> statement-breakpoint
ALTER TABLE "organizations" ADD COLUMN "readings_kept_days" integer;--> statement-breakpoint
ALTER TABLE "organizations" ADD COLUMN "rollups_kept_days" integer;--> statement-breakpoint
ALTER TABLE "rollup_progress" ADD CONSTRAINT "rollup_progress_building_id_buildings_id_fk" FOREIGN KEY ("building_id") REFERENCES "public"."buildings"("id") ON DELETE no action ON UPDATE no action;
--> statement-breakpoint

-- Written by hand from here on: partitions by resolution, readings in a narrower row, scope, retention.

CREATE TABLE reading_rollups_5min PARTITION OF reading_rollups FOR VALUES IN (300);
--> statement-breakpoint
CREATE TABLE reading_rollups_15min PARTITION OF reading_rollups FOR VALUES IN (900);
--> statement-breakpoint
CREATE TABLE reading_rollups_hour PARTITION OF reading_rollups FOR VALUES IN (3600);
--> statement-breakpoint
CREATE TABLE reading_rollups_day PARTITION OF reading_rollups FOR VALUES IN (86400);
--> statement-breakpoint

-- Readings again with their columns widest first: the same values in 8 bytes less a row.
DROP VIEW visible_readings;
--> statement-breakpoint
ALTER TABLE readings RENAME TO readings_before;
--> statement-breakpoint
CREATE TABLE readings (
	at timestamp with time zone NOT NULL,
	received_at timestamp with time zone DEFAULT now() NOT NULL,
	sensor_id integer NOT NULL,
	co2_ppm real NOT NULL,
	temp_c real,
	rh_pct real,
	import_id integer,
	battery_pct smallint,
	rssi_dbm smallint,
	marked smallint DEFAULT 0 NOT NULL,
	CONSTRAINT readings_pk PRIMARY KEY (sensor_id, at)
) PARTITION BY RANGE (at);
--> statement-breakpoint
DO $$
DECLARE part text; moment timestamptz;
BEGIN
  FOR part IN SELECT c.relname FROM pg_inherits i JOIN pg_class c ON c.oid = i.inhrelid WHERE i.inhparent = 'readings_before'::regclass ORDER BY 1 LOOP
    moment := (replace(substr(part, 10), '_', '-') || '-15T00:00:00Z')::timestamptz;
    EXECUTE format('ALTER TABLE %I RENAME TO %I', part, part || '_before');
    PERFORM ensure_readings_month(moment);
    EXECUTE format('INSERT INTO readings (at, received_at, sensor_id, co2_ppm, temp_c, rh_pct, import_id, battery_pct, rssi_dbm, marked)
      SELECT at, received_at, sensor_id, co2_ppm, temp_c, rh_pct, import_id, battery_pct, rssi_dbm, marked FROM %I ORDER BY at, sensor_id', part || '_before');
  END LOOP;
END $$;
--> statement-breakpoint
DROP TABLE readings_before;
--> statement-breakpoint
ALTER TABLE readings RENAME CONSTRAINT readings_pk TO readings_sensor_id_at_pk;
--> statement-breakpoint
ALTER TABLE readings ENABLE ROW LEVEL SECURITY;
--> statement-breakpoint
CREATE POLICY scope ON readings USING ((SELECT ebb_system()));
--> statement-breakpoint
GRANT SELECT, INSERT ON readings TO ebbmark_app;
--> statement-breakpoint
CREATE VIEW visible_readings WITH (security_barrier) AS
  SELECT r.sensor_id, r.at, r.co2_ppm, r.temp_c, r.rh_pct, p.room_id, p.building_id, p.position, p.lead
  FROM placements p
  JOIN readings r ON r.sensor_id = p.sensor_id AND r.at >= p.from_at AND (p.to_at IS NULL OR r.at < p.to_at)
  LEFT JOIN rooms m ON m.id = p.room_id
  WHERE (SELECT ebb_system())
     OR (p.organization_id = (SELECT ebb_organization())
         AND ((SELECT ebb_buildings()) IS NULL OR p.building_id = ANY ((SELECT ebb_buildings())::integer[]))
         AND ((SELECT ebb_tenancy()) IS NULL OR p.position = 'outdoor' OR ebb_holds(p.room_id, r.at))
         AND NOT ((SELECT ebb_hides_single()) AND coalesce(m.single_person, false)));
--> statement-breakpoint
GRANT SELECT ON visible_readings TO ebbmark_app;
--> statement-breakpoint

-- As visible_readings. A stretch is seen only where its sensor's placement, and a tenant's period, hold all of it: nobody sees the peak of
-- an hour that belonged in part to another room or tenant.
CREATE VIEW visible_rollups WITH (security_barrier) AS
  SELECT u.sensor_id, u.resolution_s, u.start, u.lowest_ppm, u.mean_ppm, u.highest_ppm, u.count, p.room_id, p.building_id, p.position, p.lead
  FROM placements p
  JOIN buildings b ON b.id = p.building_id
  JOIN reading_rollups u ON u.sensor_id = p.sensor_id AND u.start >= p.from_at
    AND (p.to_at IS NULL OR p.to_at >= CASE u.resolution_s WHEN 86400 THEN (u.start AT TIME ZONE b.time_zone + interval '1 day') AT TIME ZONE b.time_zone
      ELSE u.start + u.resolution_s * interval '1 second' END)
  LEFT JOIN rooms m ON m.id = p.room_id
  WHERE (SELECT ebb_system())
     OR (p.organization_id = (SELECT ebb_organization())
         AND ((SELECT ebb_buildings()) IS NULL OR p.building_id = ANY ((SELECT ebb_buildings())::integer[]))
         AND ((SELECT ebb_tenancy()) IS NULL OR p.position = 'outdoor' OR EXISTS (
           SELECT FROM room_tenancies h WHERE h.tenancy_id = (SELECT ebb_tenancy()) AND h.room_id = p.room_id AND h.from_at <= u.start
             AND (h.to_at IS NULL OR h.to_at >= CASE u.resolution_s WHEN 86400 THEN (u.start AT TIME ZONE b.time_zone + interval '1 day') AT TIME ZONE b.time_zone
               ELSE u.start + u.resolution_s * interval '1 second' END)))
         AND NOT ((SELECT ebb_hides_single()) AND coalesce(m.single_person, false)));
--> statement-breakpoint
GRANT SELECT ON visible_rollups TO ebbmark_app;
--> statement-breakpoint
ALTER TABLE reading_rollups ENABLE ROW LEVEL SECURITY;
--> statement-breakpoint
CREATE POLICY scope ON reading_rollups USING ((SELECT ebb_system()));
--> statement-breakpoint
ALTER TABLE rollup_hours ENABLE ROW LEVEL SECURITY;
--> statement-breakpoint
CREATE POLICY scope ON rollup_hours USING ((SELECT ebb_system()));
--> statement-breakpoint
ALTER TABLE rollup_progress ENABLE ROW LEVEL SECURITY;
--> statement-breakpoint
CREATE POLICY scope ON rollup_progress USING ((SELECT ebb_system()) OR EXISTS (SELECT FROM buildings b WHERE b.id = building_id));
--> statement-breakpoint
GRANT SELECT, INSERT, UPDATE, DELETE ON reading_rollups, rollup_hours, rollup_progress TO ebbmark_app;
--> statement-breakpoint

-- Retention. The application may not delete readings; these functions of the owner do, within what the organisation's row and the clock allow.
ALTER TABLE organizations ADD CONSTRAINT organizations_kept_days CHECK (readings_kept_days >= 30 AND rollups_kept_days >= readings_kept_days);
--> statement-breakpoint
-- Deletes at most `at_most` readings of an organisation from before `older_than`, oldest first a sensor; says how many went.
CREATE FUNCTION delete_old_readings(of_organization integer, older_than timestamptz, at_most integer)
RETURNS integer LANGUAGE plpgsql SECURITY DEFINER SET search_path = public AS $$
DECLARE
  kept integer := (SELECT readings_kept_days FROM organizations WHERE id = of_organization);
  gone integer;
BEGIN
  IF NOT ebb_system() THEN
    RAISE EXCEPTION 'readings are deleted by the retention job alone' USING ERRCODE = '42501';
  END IF;
  IF kept IS NULL OR older_than > now() - make_interval(days => kept) THEN
    RAISE EXCEPTION 'organisation % keeps its readings longer than until %', of_organization, older_than USING ERRCODE = '42501';
  END IF;
  WITH old AS (
    SELECT r.sensor_id, r.at FROM sensors s
    CROSS JOIN LATERAL (SELECT x.sensor_id, x.at FROM readings x WHERE x.sensor_id = s.id AND x.at < older_than ORDER BY x.at LIMIT at_most) r
    WHERE s.organization_id = of_organization LIMIT at_most)
  DELETE FROM readings d USING old WHERE d.sensor_id = old.sensor_id AND d.at = old.at;
  GET DIAGNOSTICS gone = ROW_COUNT;
  RETURN gone;
END $$;
--> statement-breakpoint
-- Months of readings: attached ones, and those that were detached and wait for their archive. `until_at` is the first instant after the month.
CREATE FUNCTION readings_months() RETURNS TABLE (partition text, until_at timestamptz, attached boolean)
LANGUAGE sql STABLE SECURITY DEFINER SET search_path = public AS $$
  SELECT c.relname::text, ((substr(right(c.relname, 7), 1, 4) || '-' || right(c.relname, 2) || '-01T00:00:00Z')::timestamptz AT TIME ZONE 'UTC' + interval '1 month') AT TIME ZONE 'UTC',
    i.inhrelid IS NOT NULL
  FROM pg_class c LEFT JOIN pg_inherits i ON i.inhrelid = c.oid AND i.inhparent = 'readings'::regclass
  WHERE c.relnamespace = 'public'::regnamespace AND c.relkind = 'r' AND c.relname ~ '^(detached_)?readings_\d{4}_\d{2}$'
  ORDER BY right(c.relname, 7), 1 $$;
--> statement-breakpoint
-- Takes a month off the table of readings, under a name of its own; jobs may still read it until it is dropped. A month that has not been over for 30 days stays.
CREATE FUNCTION detach_readings_month(month_partition text) RETURNS text LANGUAGE plpgsql SECURITY DEFINER SET search_path = public AS $$
DECLARE apart text := 'detached_' || month_partition;
BEGIN
  IF NOT ebb_system() OR NOT EXISTS (SELECT FROM readings_months() m WHERE m.partition = month_partition AND m.attached AND m.until_at < now() - interval '30 days') THEN
    RAISE EXCEPTION 'month % cannot be detached: it is no attached month that has been over for 30 days', month_partition USING ERRCODE = '42501';
  END IF;
  PERFORM set_config('lock_timeout', '2s', true);
  EXECUTE format('ALTER TABLE readings DETACH PARTITION %I', month_partition);
  EXECUTE format('ALTER TABLE %I RENAME TO %I', month_partition, apart);
  EXECUTE format('ALTER TABLE %I ENABLE ROW LEVEL SECURITY', apart);
  EXECUTE format('CREATE POLICY scope ON %I USING ((SELECT ebb_system()))', apart);
  EXECUTE format('GRANT SELECT ON %I TO ebbmark_app', apart);
  RETURN apart;
END $$;
--> statement-breakpoint
-- Drops a month that was detached before.
CREATE FUNCTION drop_detached_month(apart text) RETURNS void LANGUAGE plpgsql SECURITY DEFINER SET search_path = public AS $$
BEGIN
  IF NOT ebb_system() OR NOT EXISTS (SELECT FROM readings_months() m WHERE m.partition = apart AND NOT m.attached) THEN
    RAISE EXCEPTION '% is no detached month', apart USING ERRCODE = '42501';
  END IF;
  EXECUTE format('DROP TABLE %I', apart);
END $$;
--> statement-breakpoint
REVOKE ALL ON FUNCTION delete_old_readings(integer, timestamptz, integer), readings_months(), detach_readings_month(text), drop_detached_month(text) FROM PUBLIC;
--> statement-breakpoint
GRANT EXECUTE ON FUNCTION delete_old_readings(integer, timestamptz, integer), readings_months(), detach_readings_month(text), drop_detached_month(text) TO ebbmark_app;
