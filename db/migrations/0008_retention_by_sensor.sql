-- Sensor by sensor, each a range of the key: joined in one statement, the planner may read the whole table for every batch.
CREATE OR REPLACE FUNCTION delete_old_readings(of_organization integer, older_than timestamptz, at_most integer)
RETURNS integer LANGUAGE plpgsql SECURITY DEFINER SET search_path = public AS $$
DECLARE
  kept integer := (SELECT readings_kept_days FROM organizations WHERE id = of_organization);
  sensor integer;
  last_at timestamptz;
  gone integer := 0;
  now_gone integer;
BEGIN
  IF NOT ebb_system() THEN
    RAISE EXCEPTION 'readings are deleted by the retention job alone' USING ERRCODE = '42501';
  END IF;
  IF kept IS NULL OR older_than > now() - make_interval(days => kept) THEN
    RAISE EXCEPTION 'organisation % keeps its readings longer than until %', of_organization, older_than USING ERRCODE = '42501';
  END IF;
  FOR sensor IN SELECT id FROM sensors WHERE organization_id = of_organization ORDER BY id LOOP
    SELECT max(x.at) INTO last_at
      FROM (SELECT r.at FROM readings r WHERE r.sensor_id = sensor AND r.at < older_than ORDER BY r.at LIMIT at_most - gone) x;
    CONTINUE WHEN last_at IS NULL;
    DELETE FROM readings r WHERE r.sensor_id = sensor AND r.at <= last_at;
    GET DIAGNOSTICS now_gone = ROW_COUNT;
    gone := gone + now_gone;
    EXIT WHEN gone >= at_most;
  END LOOP;
  RETURN gone;
END $$;
--> statement-breakpoint
-- With the caller's own rights: the application may delete roll-ups.
CREATE FUNCTION delete_old_rollups(of_organization integer, older_than timestamptz, at_most integer)
RETURNS integer LANGUAGE plpgsql SET search_path = public AS $$
DECLARE
  sensor integer;
  resolution integer;
  last_start timestamptz;
  gone integer := 0;
  now_gone integer;
BEGIN
  FOR sensor IN SELECT id FROM sensors WHERE organization_id = of_organization ORDER BY id LOOP
    FOREACH resolution IN ARRAY ARRAY[300, 900, 3600, 86400] LOOP
      SELECT max(x.start) INTO last_start FROM (SELECT u.start FROM reading_rollups u
        WHERE u.sensor_id = sensor AND u.resolution_s = resolution AND u.start < older_than ORDER BY u.start LIMIT at_most - gone) x;
      CONTINUE WHEN last_start IS NULL;
      DELETE FROM reading_rollups u WHERE u.sensor_id = sensor AND u.resolution_s = resolution AND u.start <= last_start;
      GET DIAGNOSTICS now_gone = ROW_COUNT;
      gone := gone + now_gone;
      EXIT WHEN gone >= at_most;
    END LOOP;
    EXIT WHEN gone >= at_most;
  END LOOP;
  RETURN gone;
END $$;
