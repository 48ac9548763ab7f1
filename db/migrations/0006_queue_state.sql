-- The job queue's own tables are not the application's; this says how long it is, by state, and nothing of what is in it.
CREATE FUNCTION queue_state() RETURNS TABLE (state text, jobs integer, oldest_s double precision) LANGUAGE plpgsql STABLE SECURITY DEFINER
SET search_path = pg_catalog AS $$
BEGIN
  RETURN QUERY
    SELECT CASE WHEN j.attempts >= j.max_attempts AND j.locked_at IS NULL THEN 'failed' WHEN j.locked_at IS NOT NULL THEN 'running'
        WHEN j.run_at > now() THEN 'later' ELSE 'waiting' END AS s,
      count(*)::integer, coalesce(extract(epoch FROM now() - min(j.run_at))::double precision, 0)
    FROM graphile_worker.jobs j GROUP BY 1;
END $$;
--> statement-breakpoint
REVOKE ALL ON FUNCTION queue_state() FROM PUBLIC;
--> statement-breakpoint
GRANT EXECUTE ON FUNCTION queue_state() TO ebbmark_app;
