-- Written by hand: application role, scope functions, row-level security, partitions, view for people, queue.

CREATE EXTENSION IF NOT EXISTS btree_gist;
--> statement-breakpoint
DO $$ BEGIN
  IF NOT EXISTS (SELECT FROM pg_roles WHERE rolname = 'ebbmark_app') THEN
    CREATE ROLE ebbmark_app NOLOGIN;
  END IF;
EXCEPTION WHEN duplicate_object OR unique_violation THEN NULL; -- another database of this cluster made it in the same moment
END $$;
--> statement-breakpoint

-- Scope of the running transaction. Unset settings see nothing.
CREATE FUNCTION ebb_system() RETURNS boolean LANGUAGE sql STABLE PARALLEL SAFE AS
  $$ SELECT coalesce(current_setting('ebb.system', true), '') <> '' $$;
--> statement-breakpoint
CREATE FUNCTION ebb_organization() RETURNS integer LANGUAGE sql STABLE PARALLEL SAFE AS
  $$ SELECT nullif(current_setting('ebb.organization', true), '')::integer $$;
--> statement-breakpoint
-- null means every building of the organisation
CREATE FUNCTION ebb_buildings() RETURNS integer[] LANGUAGE sql STABLE PARALLEL SAFE AS
  $$ SELECT nullif(current_setting('ebb.buildings', true), '')::integer[] $$;
--> statement-breakpoint
CREATE FUNCTION ebb_tenancy() RETURNS integer LANGUAGE sql STABLE PARALLEL SAFE AS
  $$ SELECT nullif(current_setting('ebb.tenancy', true), '')::integer $$;
--> statement-breakpoint
-- live values of single-person rooms are shown unless the scope says hide
CREATE FUNCTION ebb_hides_single() RETURNS boolean LANGUAGE sql STABLE PARALLEL SAFE AS
  $$ SELECT coalesce(current_setting('ebb.single_person', true), '') = 'hide' $$;
--> statement-breakpoint
-- Rooms a tenancy holds or held; SECURITY DEFINER so that policies do not call each other in a ring.
CREATE FUNCTION ebb_tenancy_rooms() RETURNS integer[] LANGUAGE sql STABLE SECURITY DEFINER SET search_path = public AS
  $$ SELECT coalesce(array_agg(DISTINCT room_id), '{}') FROM room_tenancies WHERE tenancy_id = ebb_tenancy() $$;
--> statement-breakpoint
-- Does the scope's tenancy hold this room at this instant? True where the scope has no tenancy.
CREATE FUNCTION ebb_holds(room integer, instant timestamptz) RETURNS boolean LANGUAGE sql STABLE SECURITY DEFINER SET search_path = public AS
  $$ SELECT ebb_tenancy() IS NULL OR EXISTS (
       SELECT FROM room_tenancies h WHERE h.tenancy_id = ebb_tenancy() AND h.room_id = room
         AND h.from_at <= instant AND (h.to_at IS NULL OR instant < h.to_at)) $$;
--> statement-breakpoint
-- Did the scope's tenancy hold this room on any part of this local day (taken in UTC, a day either side of the period counts out)?
CREATE FUNCTION ebb_held_day(room integer, day date) RETURNS boolean LANGUAGE sql STABLE SECURITY DEFINER SET search_path = public AS
  $$ SELECT ebb_tenancy() IS NULL OR EXISTS (
       SELECT FROM room_tenancies h WHERE h.tenancy_id = ebb_tenancy() AND h.room_id = room
         AND (h.from_at AT TIME ZONE 'UTC')::date <= day AND (h.to_at IS NULL OR day < (h.to_at AT TIME ZONE 'UTC')::date)) $$;
--> statement-breakpoint

-- Readings by UTC month. The application may not create tables; it asks for a month here, on demand and ahead of time.
CREATE FUNCTION ensure_readings_month(moment timestamptz) RETURNS void LANGUAGE plpgsql SECURITY DEFINER SET search_path = public AS $$
DECLARE
  month_start timestamptz := date_trunc('month', moment AT TIME ZONE 'UTC') AT TIME ZONE 'UTC';
  month_end timestamptz := (date_trunc('month', moment AT TIME ZONE 'UTC') + interval '1 month') AT TIME ZONE 'UTC';
  partition text := 'readings_' || to_char(moment AT TIME ZONE 'UTC', 'YYYY_MM');
BEGIN
  IF EXISTS (SELECT FROM pg_inherits i JOIN pg_class c ON c.oid = i.inhrelid WHERE i.inhparent = 'readings'::regclass AND c.relname = partition) THEN
    RETURN;
  END IF;
  PERFORM pg_advisory_xact_lock(hashtext('ebbmark readings month'));
  -- read from the catalogue, not to_regclass: a cached "no such table" would outlive the wait for the lock
  IF EXISTS (SELECT FROM pg_inherits i JOIN pg_class c ON c.oid = i.inhrelid WHERE i.inhparent = 'readings'::regclass AND c.relname = partition) THEN
    RETURN;
  END IF;
  EXECUTE format('CREATE TABLE %I (LIKE readings INCLUDING DEFAULTS INCLUDING CONSTRAINTS)', partition);
  EXECUTE format('ALTER TABLE readings ATTACH PARTITION %I FOR VALUES FROM (%L) TO (%L)', partition, month_start, month_end);
END $$;
--> statement-breakpoint

ALTER TABLE placements ADD CONSTRAINT placements_no_overlap
  EXCLUDE USING gist (sensor_id WITH =, tstzrange(from_at, to_at) WITH &&);
--> statement-breakpoint
ALTER TABLE placements ADD CONSTRAINT placements_one_lead
  EXCLUDE USING gist (room_id WITH =, tstzrange(from_at, to_at) WITH &&) WHERE (lead AND room_id IS NOT NULL);
--> statement-breakpoint

-- What people may read of the raw record: placed sensors of their buildings, a tenant only inside its period,
-- and nothing live of single-person rooms where the scope hides them.
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
CREATE VIEW visible_latest WITH (security_barrier) AS
  SELECT l.sensor_id, l.at, l.received_at, l.co2_ppm, l.temp_c, l.rh_pct, l.battery_pct, l.rssi_dbm, p.room_id, p.building_id, p.position, p.lead
  FROM placements p
  JOIN latest_readings l ON l.sensor_id = p.sensor_id AND l.at >= p.from_at AND (p.to_at IS NULL OR l.at < p.to_at)
  LEFT JOIN rooms m ON m.id = p.room_id
  WHERE (SELECT ebb_system())
     OR (p.organization_id = (SELECT ebb_organization())
         AND ((SELECT ebb_buildings()) IS NULL OR p.building_id = ANY ((SELECT ebb_buildings())::integer[]))
         AND ((SELECT ebb_tenancy()) IS NULL OR p.position = 'outdoor' OR ebb_holds(p.room_id, l.at))
         AND NOT ((SELECT ebb_hides_single()) AND coalesce(m.single_person, false)));
--> statement-breakpoint

-- Row-level security. Organisation tables first, then buildings', then rooms'.
DO $$
DECLARE t text;
BEGIN
  FOREACH t IN ARRAY ARRAY['bases','audit_events','memberships','sensor_offsets'] LOOP
    EXECUTE format('ALTER TABLE %I ENABLE ROW LEVEL SECURITY', t);
    EXECUTE format('CREATE POLICY scope ON %I USING ((SELECT ebb_system()) OR organization_id = (SELECT ebb_organization()))', t);
  END LOOP;
  FOREACH t IN ARRAY ARRAY['floors','air_handlers','hours','closures','supply_states','night_runs'] LOOP
    EXECUTE format('ALTER TABLE %I ENABLE ROW LEVEL SECURITY', t);
    EXECUTE format('CREATE POLICY scope ON %I USING ((SELECT ebb_system()) OR (organization_id = (SELECT ebb_organization())
      AND ((SELECT ebb_buildings()) IS NULL OR building_id = ANY ((SELECT ebb_buildings())::integer[]))))', t);
  END LOOP;
  FOREACH t IN ARRAY ARRAY['decay_reviews','rate_changes','findings'] LOOP
    EXECUTE format('ALTER TABLE %I ENABLE ROW LEVEL SECURITY', t);
    EXECUTE format('CREATE POLICY scope ON %I USING ((SELECT ebb_system()) OR (organization_id = (SELECT ebb_organization())
      AND ((SELECT ebb_buildings()) IS NULL OR building_id = ANY ((SELECT ebb_buildings())::integer[]))
      AND ((SELECT ebb_tenancy()) IS NULL OR room_id = ANY ((SELECT ebb_tenancy_rooms())::integer[]))))', t);
  END LOOP;
END $$;
--> statement-breakpoint
ALTER TABLE organizations ENABLE ROW LEVEL SECURITY;
--> statement-breakpoint
CREATE POLICY scope ON organizations USING ((SELECT ebb_system()) OR id = (SELECT ebb_organization()));
--> statement-breakpoint
ALTER TABLE buildings ENABLE ROW LEVEL SECURITY;
--> statement-breakpoint
CREATE POLICY scope ON buildings USING ((SELECT ebb_system()) OR (organization_id = (SELECT ebb_organization())
  AND ((SELECT ebb_buildings()) IS NULL OR id = ANY ((SELECT ebb_buildings())::integer[]))));
--> statement-breakpoint
ALTER TABLE tenancies ENABLE ROW LEVEL SECURITY;
--> statement-breakpoint
CREATE POLICY scope ON tenancies USING ((SELECT ebb_system()) OR (organization_id = (SELECT ebb_organization())
  AND ((SELECT ebb_buildings()) IS NULL OR building_id = ANY ((SELECT ebb_buildings())::integer[]))
  AND ((SELECT ebb_tenancy()) IS NULL OR id = (SELECT ebb_tenancy()))));
--> statement-breakpoint
ALTER TABLE room_tenancies ENABLE ROW LEVEL SECURITY;
--> statement-breakpoint
CREATE POLICY scope ON room_tenancies USING ((SELECT ebb_system()) OR (organization_id = (SELECT ebb_organization())
  AND ((SELECT ebb_tenancy()) IS NULL OR tenancy_id = (SELECT ebb_tenancy()))));
--> statement-breakpoint
ALTER TABLE rooms ENABLE ROW LEVEL SECURITY;
--> statement-breakpoint
CREATE POLICY scope ON rooms USING ((SELECT ebb_system()) OR (organization_id = (SELECT ebb_organization())
  AND ((SELECT ebb_buildings()) IS NULL OR building_id = ANY ((SELECT ebb_buildings())::integer[]))
  AND ((SELECT ebb_tenancy()) IS NULL OR id = ANY ((SELECT ebb_tenancy_rooms())::integer[]))));
--> statement-breakpoint
ALTER TABLE room_designs ENABLE ROW LEVEL SECURITY;
--> statement-breakpoint
CREATE POLICY scope ON room_designs USING ((SELECT ebb_system()) OR (organization_id = (SELECT ebb_organization())
  AND ((SELECT ebb_tenancy()) IS NULL OR room_id = ANY ((SELECT ebb_tenancy_rooms())::integer[]))));
--> statement-breakpoint
ALTER TABLE sensors ENABLE ROW LEVEL SECURITY;
--> statement-breakpoint
CREATE POLICY scope ON sensors USING ((SELECT ebb_system()) OR (organization_id = (SELECT ebb_organization())
  AND ((SELECT ebb_buildings()) IS NULL OR building_id = ANY ((SELECT ebb_buildings())::integer[]))
  AND ((SELECT ebb_tenancy()) IS NULL OR EXISTS (SELECT FROM placements p WHERE p.sensor_id = sensors.id))));
--> statement-breakpoint
ALTER TABLE placements ENABLE ROW LEVEL SECURITY;
--> statement-breakpoint
CREATE POLICY scope ON placements USING ((SELECT ebb_system()) OR (organization_id = (SELECT ebb_organization())
  AND ((SELECT ebb_buildings()) IS NULL OR building_id = ANY ((SELECT ebb_buildings())::integer[]))
  AND ((SELECT ebb_tenancy()) IS NULL OR room_id = ANY ((SELECT ebb_tenancy_rooms())::integer[]))));
--> statement-breakpoint
ALTER TABLE decays ENABLE ROW LEVEL SECURITY;
--> statement-breakpoint
CREATE POLICY scope ON decays USING ((SELECT ebb_system()) OR (organization_id = (SELECT ebb_organization())
  AND ((SELECT ebb_buildings()) IS NULL OR building_id = ANY ((SELECT ebb_buildings())::integer[]))
  AND ((SELECT ebb_tenancy()) IS NULL OR ebb_held_day(room_id, night))));
--> statement-breakpoint
ALTER TABLE room_weeks ENABLE ROW LEVEL SECURITY;
--> statement-breakpoint
CREATE POLICY scope ON room_weeks USING ((SELECT ebb_system()) OR (organization_id = (SELECT ebb_organization())
  AND ((SELECT ebb_buildings()) IS NULL OR building_id = ANY ((SELECT ebb_buildings())::integer[]))
  AND ((SELECT ebb_tenancy()) IS NULL OR ebb_held_day(room_id, through_night))));
--> statement-breakpoint
ALTER TABLE digests ENABLE ROW LEVEL SECURITY;
--> statement-breakpoint
CREATE POLICY scope ON digests USING ((SELECT ebb_system()) OR (organization_id = (SELECT ebb_organization())
  AND ((SELECT ebb_buildings()) IS NULL OR building_id = ANY ((SELECT ebb_buildings())::integer[]))
  AND ((SELECT ebb_tenancy()) IS NULL OR tenancy_id = (SELECT ebb_tenancy()))));
--> statement-breakpoint
ALTER TABLE digest_deliveries ENABLE ROW LEVEL SECURITY;
--> statement-breakpoint
CREATE POLICY scope ON digest_deliveries USING ((SELECT ebb_system()) OR (organization_id = (SELECT ebb_organization())
  AND ((SELECT ebb_tenancy()) IS NULL OR EXISTS (SELECT FROM digests d WHERE d.id = digest_id))));
--> statement-breakpoint
ALTER TABLE refused_messages ENABLE ROW LEVEL SECURITY;
--> statement-breakpoint
CREATE POLICY scope ON refused_messages USING ((SELECT ebb_system()) OR (organization_id = (SELECT ebb_organization())
  AND (SELECT ebb_tenancy()) IS NULL AND EXISTS (SELECT FROM sensors s WHERE s.id = sensor_id)));
--> statement-breakpoint
ALTER TABLE users ENABLE ROW LEVEL SECURITY;
--> statement-breakpoint
CREATE POLICY scope ON users USING ((SELECT ebb_system()) OR EXISTS (SELECT FROM memberships m WHERE m.user_id = users.id));
--> statement-breakpoint
-- Jobs, ingest and sign-in alone: raw readings, sessions, sign-in events, late marks, heartbeats.
DO $$
DECLARE t text;
BEGIN
  FOREACH t IN ARRAY ARRAY['readings','latest_readings','sessions','sign_in_events','late_readings','worker_heartbeats'] LOOP
    EXECUTE format('ALTER TABLE %I ENABLE ROW LEVEL SECURITY', t);
    EXECUTE format('CREATE POLICY scope ON %I USING ((SELECT ebb_system()))', t);
  END LOOP;
END $$;
--> statement-breakpoint

GRANT USAGE ON SCHEMA public TO ebbmark_app;
--> statement-breakpoint
GRANT SELECT, INSERT, UPDATE, DELETE ON organizations, users, memberships, sessions, sign_in_events, buildings, floors, air_handlers, hours, closures,
  supply_states, tenancies, room_tenancies, bases, rooms, room_designs, sensors, placements, sensor_offsets, latest_readings, refused_messages,
  late_readings, decays, decay_reviews, room_weeks, rate_changes, findings, night_runs, digests, digest_deliveries, worker_heartbeats TO ebbmark_app;
--> statement-breakpoint
-- The raw reading is never changed or deleted by the application; the audit trail is never rewritten.
GRANT SELECT, INSERT ON readings, audit_events TO ebbmark_app;
--> statement-breakpoint
GRANT SELECT ON visible_readings, visible_latest TO ebbmark_app;
--> statement-breakpoint
GRANT USAGE ON ALL SEQUENCES IN SCHEMA public TO ebbmark_app;
