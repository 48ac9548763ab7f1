-- The job queue's own schema is made by its library (db/migrate.ts); this function lets the application add to it inside its own transactions.
-- `only_if_absent` leaves a queued, running or failed job of the same key alone; otherwise a waiting one is replaced and a running one followed.
CREATE FUNCTION queue_job(task text, payload json, job_key text DEFAULT NULL, queue_name text DEFAULT NULL, only_if_absent boolean DEFAULT false)
RETURNS void LANGUAGE plpgsql SECURITY DEFINER SET search_path = pg_catalog AS $$
BEGIN
  PERFORM graphile_worker.add_job(identifier => task, payload => payload, queue_name => queue_name, job_key => job_key, max_attempts => 8,
    job_key_mode => CASE WHEN only_if_absent AND job_key IS NOT NULL THEN 'unsafe_dedupe' ELSE 'replace' END);
END $$;
--> statement-breakpoint
REVOKE ALL ON FUNCTION queue_job(text, json, text, text, boolean) FROM PUBLIC;
--> statement-breakpoint
GRANT EXECUTE ON FUNCTION queue_job(text, json, text, text, boolean) TO ebbmark_app;
