CREATE TABLE "api_answers" (
	"api_key_id" integer NOT NULL,
	"idempotency_key" text NOT NULL,
	"body_sha256" text NOT NULL,
	"answer" jsonb NOT NULL,
	"at" timestamp with time zone NOT NULL,
	CONSTRAINT "api_answers_api_key_id_idempotency_key_pk" PRIMARY KEY("api_key_id","idempotency_key")
);
--> statement-breakpoint
CREATE TABLE "api_keys" (
	"id" integer PRIMARY KEY GENERATED ALWAYS AS IDENTITY (sequence name "api_keys_id_seq" INCREMENT BY 1 MINVALUE 1 MAXVALUE 2147483647 START WITH 1 CACHE 1),
	"public_id" text NOT NULL,
	"organization_id" integer NOT NULL,
	"building_id" integer,
	"name" text NOT NULL,
	"begins_with" text NOT NULL,
	"key_sha256" text NOT NULL,
	"scopes" text[] NOT NULL,
	"created_by" integer,
	"created_at" timestamp with time zone DEFAULT now() NOT NULL,
	"last_used_at" timestamp with time zone,
	"revoked_at" timestamp with time zone,
	CONSTRAINT "api_keys_public_id_unique" UNIQUE("public_id"),
	CONSTRAINT "api_keys_key_sha256_unique" UNIQUE("key_sha256")
);
--> statement-breakpoint
CREATE TABLE "feed_candidates" (
	"feed_id" integer NOT NULL,
	"device_id" text NOT NULL,
	"messages" bigint NOT NULL,
	"first_at" timestamp with time zone NOT NULL,
	"last_at" timestamp with time zone NOT NULL,
	"last_co2_ppm" text,
	CONSTRAINT "feed_candidates_feed_id_device_id_pk" PRIMARY KEY("feed_id","device_id")
);
--> statement-breakpoint
CREATE TABLE "feeds" (
	"id" integer PRIMARY KEY GENERATED ALWAYS AS IDENTITY (sequence name "feeds_id_seq" INCREMENT BY 1 MINVALUE 1 MAXVALUE 2147483647 START WITH 1 CACHE 1),
	"public_id" text NOT NULL,
	"organization_id" integer NOT NULL,
	"building_id" integer NOT NULL,
	"name" text NOT NULL,
	"broker_url" text NOT NULL,
	"user_name" text,
	"password_sealed" text,
	"ca_pem" text,
	"topic_filter" text NOT NULL,
	"mapping" jsonb NOT NULL,
	"enabled" boolean DEFAULT false NOT NULL,
	"created_by" integer,
	"created_at" timestamp with time zone DEFAULT now() NOT NULL,
	"changed_at" timestamp with time zone DEFAULT now() NOT NULL,
	"runner" text,
	"leased_until" timestamp with time zone,
	"connected_at" timestamp with time zone,
	"last_message_at" timestamp with time zone,
	"last_error" text,
	"last_error_at" timestamp with time zone,
	"messages" bigint DEFAULT 0 NOT NULL,
	"readings" bigint DEFAULT 0 NOT NULL,
	"refusals" bigint DEFAULT 0 NOT NULL,
	CONSTRAINT "feeds_public_id_unique" UNIQUE("public_id")
);
--> statement-breakpoint
ALTER TABLE "api_answers" ADD CONSTRAINT "api_answers_api_key_id_api_keys_id_fk" FOREIGN KEY ("api_key_id") REFERENCES "public"."api_keys"("id") ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE "api_keys" ADD CONSTRAINT "api_keys_organization_id_organizations_id_fk" FOREIGN KEY ("organization_id") REFERENCES "public"."organizations"("id") ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE "api_keys" ADD CONSTRAINT "api_keys_building_id_buildings_id_fk" FOREIGN KEY ("building_id") REFERENCES "public"."buildings"("id") ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE "api_keys" ADD CONSTRAINT "api_keys_created_by_users_id_fk" FOREIGN KEY ("created_by") REFERENCES "public"."users"("id") ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE "feed_candidates" ADD CONSTRAINT "feed_candidates_feed_id_feeds_id_fk" FOREIGN KEY ("feed_id") REFERENCES "public"."feeds"("id") ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE "feeds" ADD CONSTRAINT "feeds_organization_id_organizations_id_fk" FOREIGN KEY ("organization_id") REFERENCES "public"."organizations"("id") ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE "feeds" ADD CONSTRAINT "feeds_building_id_buildings_id_fk" FOREIGN KEY ("building_id") REFERENCES "public"."buildings"("id") ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE "feeds" ADD CONSTRAINT "feeds_created_by_users_id_fk" FOREIGN KEY ("created_by") REFERENCES "public"."users"("id") ON DELETE no action ON UPDATE no action;--> statement-breakpoint
CREATE INDEX "feeds_building" ON "feeds" USING btree ("building_id");
--> statement-breakpoint

-- Written by hand from here on: scope and grants.
ALTER TABLE api_keys ENABLE ROW LEVEL SECURITY;
--> statement-breakpoint
CREATE POLICY scope ON api_keys USING ((SELECT ebb_system()) OR (organization_id = (SELECT ebb_organization())
  AND (SELECT ebb_tenancy()) IS NULL
  AND ((SELECT ebb_buildings()) IS NULL OR building_id = ANY ((SELECT ebb_buildings())::integer[]))));
--> statement-breakpoint
ALTER TABLE api_answers ENABLE ROW LEVEL SECURITY;
--> statement-breakpoint
CREATE POLICY scope ON api_answers USING ((SELECT ebb_system()));
--> statement-breakpoint
ALTER TABLE feeds ENABLE ROW LEVEL SECURITY;
--> statement-breakpoint
CREATE POLICY scope ON feeds USING ((SELECT ebb_system()) OR (organization_id = (SELECT ebb_organization())
  AND (SELECT ebb_tenancy()) IS NULL
  AND ((SELECT ebb_buildings()) IS NULL OR building_id = ANY ((SELECT ebb_buildings())::integer[]))));
--> statement-breakpoint
ALTER TABLE feed_candidates ENABLE ROW LEVEL SECURITY;
--> statement-breakpoint
CREATE POLICY scope ON feed_candidates USING ((SELECT ebb_system()) OR EXISTS (SELECT FROM feeds f WHERE f.id = feed_id));
--> statement-breakpoint
-- What a feed refused stands under the feed's name and belongs to no sensor: seen by whoever sees the feed.
CREATE POLICY feed ON refused_messages FOR SELECT USING (organization_id = (SELECT ebb_organization()) AND sensor_id IS NULL
  AND EXISTS (SELECT FROM feeds f WHERE 'feed ' || f.public_id = source));
--> statement-breakpoint
GRANT SELECT, INSERT, UPDATE, DELETE ON api_keys, api_answers, feeds, feed_candidates TO ebbmark_app;
--> statement-breakpoint
GRANT USAGE ON ALL SEQUENCES IN SCHEMA public TO ebbmark_app;
