CREATE TYPE "public"."member_role" AS ENUM('owner', 'engineer', 'approver', 'technician', 'viewer');--> statement-breakpoint
CREATE TYPE "public"."exposure_kind" AS ENUM('seconds', 'mJ/cm2');--> statement-breakpoint
CREATE TYPE "public"."film_reading_state" AS ENUM('measured', 'no-film', 'lost-in-wash', 'excluded');--> statement-breakpoint
CREATE TYPE "public"."study_state" AS ENUM('open', 'paused', 'decided');--> statement-breakpoint
CREATE TABLE "audit_event" (
	"id" uuid PRIMARY KEY NOT NULL,
	"shop_id" uuid NOT NULL,
	"actor_user_id" uuid,
	"action" varchar(60) NOT NULL,
	"thing" varchar(60) NOT NULL,
	"thing_id" uuid,
	"before" jsonb,
	"after" jsonb,
	"at" timestamp with time zone DEFAULT now() NOT NULL
);
--> statement-breakpoint
CREATE TABLE "idempotency_key" (
	"shop_id" uuid NOT NULL,
	"user_id" uuid NOT NULL,
	"key" varchar(200) NOT NULL,
	"request_hash" varchar(64) NOT NULL,
	"status" integer,
	"response" jsonb,
	"created_at" timestamp with time zone DEFAULT now() NOT NULL,
	CONSTRAINT "idempotency_key_shop_id_user_id_key_pk" PRIMARY KEY("shop_id","user_id","key")
);
--> statement-breakpoint
CREATE TABLE "invitation" (
	"id" uuid PRIMARY KEY NOT NULL,
	"shop_id" uuid NOT NULL,
	"email" varchar(254) NOT NULL,
	"role" "member_role" NOT NULL,
	"token_hash" varchar(64) NOT NULL,
	"invited_by_user_id" uuid,
	"created_at" timestamp with time zone DEFAULT now() NOT NULL,
	"expires_at" timestamp with time zone NOT NULL,
	"accepted_at" timestamp with time zone,
	"revoked_at" timestamp with time zone
);
--> statement-breakpoint
CREATE TABLE "membership" (
	"shop_id" uuid NOT NULL,
	"user_id" uuid NOT NULL,
	"role" "member_role" NOT NULL,
	"joined_at" timestamp with time zone DEFAULT now() NOT NULL,
	CONSTRAINT "membership_shop_id_user_id_pk" PRIMARY KEY("shop_id","user_id")
);
--> statement-breakpoint
CREATE TABLE "password_reset" (
	"id" uuid PRIMARY KEY NOT NULL,
	"user_id" uuid NOT NULL,
	"token_hash" varchar(64) NOT NULL,
	"created_at" timestamp with time zone DEFAULT now() NOT NULL,
	"expires_at" timestamp with time zone NOT NULL,
	"used_at" timestamp with time zone
);
--> statement-breakpoint
CREATE TABLE "session" (
	"sid" varchar PRIMARY KEY NOT NULL,
	"sess" json NOT NULL,
	"expire" timestamp (6) NOT NULL
);
--> statement-breakpoint
CREATE TABLE "shop" (
	"id" uuid PRIMARY KEY NOT NULL,
	"name" varchar(120) NOT NULL,
	"demo" boolean DEFAULT false NOT NULL,
	"version" integer DEFAULT 1 NOT NULL,
	"created_at" timestamp with time zone DEFAULT now() NOT NULL
);
--> statement-breakpoint
CREATE TABLE "sign_up" (
	"id" uuid PRIMARY KEY NOT NULL,
	"email" varchar(254) NOT NULL,
	"display_name" varchar(120) NOT NULL,
	"shop_name" varchar(120) NOT NULL,
	"password_hash" text NOT NULL,
	"token_hash" varchar(64) NOT NULL,
	"created_at" timestamp with time zone DEFAULT now() NOT NULL,
	"expires_at" timestamp with time zone NOT NULL,
	"confirmed_at" timestamp with time zone
);
--> statement-breakpoint
CREATE TABLE "user" (
	"id" uuid PRIMARY KEY NOT NULL,
	"email" varchar(254) NOT NULL,
	"display_name" varchar(120) NOT NULL,
	"password_hash" text NOT NULL,
	"created_at" timestamp with time zone DEFAULT now() NOT NULL,
	CONSTRAINT "user_email_lower" CHECK ("user"."email" = lower("user"."email"))
);
--> statement-breakpoint
CREATE TABLE "lot" (
	"id" uuid PRIMARY KEY NOT NULL,
	"shop_id" uuid NOT NULL,
	"resin_id" uuid NOT NULL,
	"code" varchar(120) NOT NULL,
	"received_on" date,
	"opened_on" date,
	"expires_on" date,
	"notes" text DEFAULT '' NOT NULL,
	"version" integer DEFAULT 1 NOT NULL,
	"created_at" timestamp with time zone DEFAULT now() NOT NULL,
	"updated_at" timestamp with time zone DEFAULT now() NOT NULL,
	"retired_at" timestamp with time zone,
	CONSTRAINT "lot_shop_id_id" UNIQUE("shop_id","id")
);
--> statement-breakpoint
CREATE TABLE "pairing" (
	"id" uuid PRIMARY KEY NOT NULL,
	"shop_id" uuid NOT NULL,
	"printer_id" uuid NOT NULL,
	"resin_id" uuid NOT NULL,
	"notes" text DEFAULT '' NOT NULL,
	"version" integer DEFAULT 1 NOT NULL,
	"created_at" timestamp with time zone DEFAULT now() NOT NULL,
	"updated_at" timestamp with time zone DEFAULT now() NOT NULL,
	"retired_at" timestamp with time zone,
	CONSTRAINT "pairing_unique" UNIQUE("shop_id","printer_id","resin_id"),
	CONSTRAINT "pairing_shop_id_id" UNIQUE("shop_id","id")
);
--> statement-breakpoint
CREATE TABLE "printer" (
	"id" uuid PRIMARY KEY NOT NULL,
	"shop_id" uuid NOT NULL,
	"name" varchar(120) NOT NULL,
	"light_engine_wavelength_nanometres" double precision NOT NULL,
	"pixel_size_micrometres" double precision NOT NULL,
	"plate_width_millimetres" double precision NOT NULL,
	"plate_depth_millimetres" double precision NOT NULL,
	"exposure_step_seconds" double precision NOT NULL,
	"exposure_seconds_min" double precision NOT NULL,
	"exposure_seconds_max" double precision NOT NULL,
	"irradiance_milliwatts_per_square_centimetre" double precision,
	"notes" text DEFAULT '' NOT NULL,
	"version" integer DEFAULT 1 NOT NULL,
	"created_at" timestamp with time zone DEFAULT now() NOT NULL,
	"updated_at" timestamp with time zone DEFAULT now() NOT NULL,
	"retired_at" timestamp with time zone,
	CONSTRAINT "printer_shop_id_id" UNIQUE("shop_id","id"),
	CONSTRAINT "printer_exposure_range" CHECK ("printer"."exposure_seconds_min" > 0 and "printer"."exposure_seconds_max" > "printer"."exposure_seconds_min" and "printer"."exposure_seconds_max" <= 3600),
	CONSTRAINT "printer_exposure_step" CHECK ("printer"."exposure_step_seconds" > 0 and "printer"."exposure_step_seconds" <= 60)
);
--> statement-breakpoint
CREATE TABLE "resin" (
	"id" uuid PRIMARY KEY NOT NULL,
	"shop_id" uuid NOT NULL,
	"name" varchar(120) NOT NULL,
	"description" varchar(400) DEFAULT '' NOT NULL,
	"notes" text DEFAULT '' NOT NULL,
	"version" integer DEFAULT 1 NOT NULL,
	"created_at" timestamp with time zone DEFAULT now() NOT NULL,
	"updated_at" timestamp with time zone DEFAULT now() NOT NULL,
	"retired_at" timestamp with time zone,
	CONSTRAINT "resin_shop_id_id" UNIQUE("shop_id","id")
);
--> statement-breakpoint
CREATE TABLE "film_reading" (
	"id" uuid PRIMARY KEY NOT NULL,
	"shop_id" uuid NOT NULL,
	"study_id" uuid NOT NULL,
	"exposure" double precision NOT NULL,
	"exposure_text" varchar(100) NOT NULL,
	"replicate" integer NOT NULL,
	"depth_micrometres" double precision,
	"depth_text" varchar(100) NOT NULL,
	"standard_uncertainty_micrometres" double precision,
	"state" "film_reading_state" NOT NULL,
	"exclusion_reason" varchar(400),
	"note" varchar(400) DEFAULT '' NOT NULL,
	"import_batch_id" uuid,
	"version" integer DEFAULT 1 NOT NULL,
	"entered_by_user_id" uuid,
	"entered_at" timestamp with time zone DEFAULT now() NOT NULL,
	"updated_at" timestamp with time zone DEFAULT now() NOT NULL,
	"withdrawn_at" timestamp with time zone,
	CONSTRAINT "film_reading_exposure" CHECK ("film_reading"."exposure" > 0 and "film_reading"."exposure" <= 1e9),
	CONSTRAINT "film_reading_depth" CHECK ("film_reading"."depth_micrometres" is null or ("film_reading"."depth_micrometres" >= -1e5 and "film_reading"."depth_micrometres" <= 1e5)),
	CONSTRAINT "film_reading_measured" CHECK ("film_reading"."state" <> 'measured' or "film_reading"."depth_micrometres" is not null),
	CONSTRAINT "film_reading_excluded" CHECK ("film_reading"."state" <> 'excluded' or "film_reading"."exclusion_reason" is not null)
);
--> statement-breakpoint
CREATE TABLE "film_reading_revision" (
	"reading_id" uuid NOT NULL,
	"version" integer NOT NULL,
	"shop_id" uuid NOT NULL,
	"before" jsonb NOT NULL,
	"changed_by_user_id" uuid,
	"changed_at" timestamp with time zone DEFAULT now() NOT NULL,
	CONSTRAINT "film_reading_revision_reading_id_version_pk" PRIMARY KEY("reading_id","version")
);
--> statement-breakpoint
CREATE TABLE "fit" (
	"study_id" uuid NOT NULL,
	"shop_id" uuid NOT NULL,
	"kind" varchar(40) NOT NULL,
	"inputs_hash" varchar(64) NOT NULL,
	"library_version" varchar(40) NOT NULL,
	"readings_revision" integer NOT NULL,
	"settled" boolean DEFAULT false NOT NULL,
	"outcome" jsonb NOT NULL,
	"computed_at" timestamp with time zone DEFAULT now() NOT NULL,
	CONSTRAINT "fit_study_id_kind_inputs_hash_pk" PRIMARY KEY("study_id","kind","inputs_hash")
);
--> statement-breakpoint
CREATE TABLE "import_batch" (
	"id" uuid PRIMARY KEY NOT NULL,
	"shop_id" uuid NOT NULL,
	"study_id" uuid NOT NULL,
	"file_name" varchar(200) NOT NULL,
	"mapping" jsonb NOT NULL,
	"accepted_rows" integer NOT NULL,
	"rejected_rows" integer NOT NULL,
	"rejected" jsonb NOT NULL,
	"header" jsonb NOT NULL,
	"imported_by_user_id" uuid,
	"imported_at" timestamp with time zone DEFAULT now() NOT NULL,
	"withdrawn_at" timestamp with time zone,
	CONSTRAINT "import_batch_shop_id_id" UNIQUE("shop_id","id")
);
--> statement-breakpoint
CREATE TABLE "import_mapping" (
	"shop_id" uuid NOT NULL,
	"header_hash" varchar(64) NOT NULL,
	"mapping" jsonb NOT NULL,
	"updated_at" timestamp with time zone DEFAULT now() NOT NULL,
	CONSTRAINT "import_mapping_shop_id_header_hash_pk" PRIMARY KEY("shop_id","header_hash")
);
--> statement-breakpoint
CREATE TABLE "study" (
	"id" uuid PRIMARY KEY NOT NULL,
	"shop_id" uuid NOT NULL,
	"pairing_id" uuid NOT NULL,
	"lot_id" uuid,
	"name" varchar(120) NOT NULL,
	"layer_height_micrometres" double precision NOT NULL,
	"resin_temperature_celsius" double precision,
	"exposure_kind" "exposure_kind" DEFAULT 'seconds' NOT NULL,
	"state" "study_state" DEFAULT 'open' NOT NULL,
	"notes" text DEFAULT '' NOT NULL,
	"detail_target" jsonb,
	"film" jsonb NOT NULL,
	"readings_revision" integer DEFAULT 0 NOT NULL,
	"version" integer DEFAULT 1 NOT NULL,
	"created_at" timestamp with time zone DEFAULT now() NOT NULL,
	"updated_at" timestamp with time zone DEFAULT now() NOT NULL,
	"retired_at" timestamp with time zone,
	CONSTRAINT "study_shop_id_id" UNIQUE("shop_id","id"),
	CONSTRAINT "study_layer_height" CHECK ("study"."layer_height_micrometres" > 0 and "study"."layer_height_micrometres" <= 1000)
);
--> statement-breakpoint
ALTER TABLE "audit_event" ADD CONSTRAINT "audit_event_shop_id_shop_id_fk" FOREIGN KEY ("shop_id") REFERENCES "public"."shop"("id") ON DELETE cascade ON UPDATE no action;--> statement-breakpoint
ALTER TABLE "audit_event" ADD CONSTRAINT "audit_event_actor_user_id_user_id_fk" FOREIGN KEY ("actor_user_id") REFERENCES "public"."user"("id") ON DELETE set null ON UPDATE no action;--> statement-breakpoint
ALTER TABLE "idempotency_key" ADD CONSTRAINT "idempotency_key_shop_id_shop_id_fk" FOREIGN KEY ("shop_id") REFERENCES "public"."shop"("id") ON DELETE cascade ON UPDATE no action;--> statement-breakpoint
ALTER TABLE "idempotency_key" ADD CONSTRAINT "idempotency_key_user_id_user_id_fk" FOREIGN KEY ("user_id") REFERENCES "public"."user"("id") ON DELETE cascade ON UPDATE no action;--> statement-breakpoint
ALTER TABLE "invitation" ADD CONSTRAINT "invitation_shop_id_shop_id_fk" FOREIGN KEY ("shop_id") REFERENCES "public"."shop"("id") ON DELETE cascade ON UPDATE no action;--> statement-breakpoint
ALTER TABLE "invitation" ADD CONSTRAINT "invitation_invited_by_user_id_user_id_fk" FOREIGN KEY ("invited_by_user_id") REFERENCES "public"."user"("id") ON DELETE set null ON UPDATE no action;--> statement-breakpoint
ALTER TABLE "membership" ADD CONSTRAINT "membership_shop_id_shop_id_fk" FOREIGN KEY ("shop_id") REFERENCES "public"."shop"("id") ON DELETE cascade ON UPDATE no action;--> statement-breakpoint
ALTER TABLE "membership" ADD CONSTRAINT "membership_user_id_user_id_fk" FOREIGN KEY ("user_id") REFERENCES "public"."user"("id") ON DELETE cascade ON UPDATE no action;--> statement-breakpoint
ALTER TABLE "password_reset" ADD CONSTRAINT "password_reset_user_id_user_id_fk" FOREIGN KEY ("user_id") REFERENCES "public"."user"("id") ON DELETE cascade ON UPDATE no action;--> statement-breakpoint
ALTER TABLE "lot" ADD CONSTRAINT "lot_shop_id_shop_id_fk" FOREIGN KEY ("shop_id") REFERENCES "public"."shop"("id") ON DELETE cascade ON UPDATE no action;--> statement-breakpoint
ALTER TABLE "lot" ADD CONSTRAINT "lot_resin_same_shop" FOREIGN KEY ("shop_id","resin_id") REFERENCES "public"."resin"("shop_id","id") ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE "pairing" ADD CONSTRAINT "pairing_shop_id_shop_id_fk" FOREIGN KEY ("shop_id") REFERENCES "public"."shop"("id") ON DELETE cascade ON UPDATE no action;--> statement-breakpoint
ALTER TABLE "pairing" ADD CONSTRAINT "pairing_printer_same_shop" FOREIGN KEY ("shop_id","printer_id") REFERENCES "public"."printer"("shop_id","id") ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE "pairing" ADD CONSTRAINT "pairing_resin_same_shop" FOREIGN KEY ("shop_id","resin_id") REFERENCES "public"."resin"("shop_id","id") ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE "printer" ADD CONSTRAINT "printer_shop_id_shop_id_fk" FOREIGN KEY ("shop_id") REFERENCES "public"."shop"("id") ON DELETE cascade ON UPDATE no action;--> statement-breakpoint
ALTER TABLE "resin" ADD CONSTRAINT "resin_shop_id_shop_id_fk" FOREIGN KEY ("shop_id") REFERENCES "public"."shop"("id") ON DELETE cascade ON UPDATE no action;--> statement-breakpoint
ALTER TABLE "film_reading" ADD CONSTRAINT "film_reading_shop_id_shop_id_fk" FOREIGN KEY ("shop_id") REFERENCES "public"."shop"("id") ON DELETE cascade ON UPDATE no action;--> statement-breakpoint
ALTER TABLE "film_reading" ADD CONSTRAINT "film_reading_import_batch_id_import_batch_id_fk" FOREIGN KEY ("import_batch_id") REFERENCES "public"."import_batch"("id") ON DELETE set null ON UPDATE no action;--> statement-breakpoint
ALTER TABLE "film_reading" ADD CONSTRAINT "film_reading_entered_by_user_id_user_id_fk" FOREIGN KEY ("entered_by_user_id") REFERENCES "public"."user"("id") ON DELETE set null ON UPDATE no action;--> statement-breakpoint
ALTER TABLE "film_reading" ADD CONSTRAINT "film_reading_study_same_shop" FOREIGN KEY ("shop_id","study_id") REFERENCES "public"."study"("shop_id","id") ON DELETE cascade ON UPDATE no action;--> statement-breakpoint
ALTER TABLE "film_reading_revision" ADD CONSTRAINT "film_reading_revision_reading_id_film_reading_id_fk" FOREIGN KEY ("reading_id") REFERENCES "public"."film_reading"("id") ON DELETE cascade ON UPDATE no action;--> statement-breakpoint
ALTER TABLE "film_reading_revision" ADD CONSTRAINT "film_reading_revision_shop_id_shop_id_fk" FOREIGN KEY ("shop_id") REFERENCES "public"."shop"("id") ON DELETE cascade ON UPDATE no action;--> statement-breakpoint
ALTER TABLE "film_reading_revision" ADD CONSTRAINT "film_reading_revision_changed_by_user_id_user_id_fk" FOREIGN KEY ("changed_by_user_id") REFERENCES "public"."user"("id") ON DELETE set null ON UPDATE no action;--> statement-breakpoint
ALTER TABLE "fit" ADD CONSTRAINT "fit_shop_id_shop_id_fk" FOREIGN KEY ("shop_id") REFERENCES "public"."shop"("id") ON DELETE cascade ON UPDATE no action;--> statement-breakpoint
ALTER TABLE "fit" ADD CONSTRAINT "fit_study_same_shop" FOREIGN KEY ("shop_id","study_id") REFERENCES "public"."study"("shop_id","id") ON DELETE cascade ON UPDATE no action;--> statement-breakpoint
ALTER TABLE "import_batch" ADD CONSTRAINT "import_batch_shop_id_shop_id_fk" FOREIGN KEY ("shop_id") REFERENCES "public"."shop"("id") ON DELETE cascade ON UPDATE no action;--> statement-breakpoint
ALTER TABLE "import_batch" ADD CONSTRAINT "import_batch_imported_by_user_id_user_id_fk" FOREIGN KEY ("imported_by_user_id") REFERENCES "public"."user"("id") ON DELETE set null ON UPDATE no action;--> statement-breakpoint
ALTER TABLE "import_batch" ADD CONSTRAINT "import_batch_study_same_shop" FOREIGN KEY ("shop_id","study_id") REFERENCES "public"."study"("shop_id","id") ON DELETE cascade ON UPDATE no action;--> statement-breakpoint
ALTER TABLE "import_mapping" ADD CONSTRAINT "import_mapping_shop_id_shop_id_fk" FOREIGN KEY ("shop_id") REFERENCES "public"."shop"("id") ON DELETE cascade ON UPDATE no action;--> statement-breakpoint
ALTER TABLE "study" ADD CONSTRAINT "study_shop_id_shop_id_fk" FOREIGN KEY ("shop_id") REFERENCES "public"."shop"("id") ON DELETE cascade ON UPDATE no action;--> statement-breakpoint
ALTER TABLE "study" ADD CONSTRAINT "study_pairing_same_shop" FOREIGN KEY ("shop_id","pairing_id") REFERENCES "public"."pairing"("shop_id","id") ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE "study" ADD CONSTRAINT "study_lot_same_shop" FOREIGN KEY ("shop_id","lot_id") REFERENCES "public"."lot"("shop_id","id") ON DELETE no action ON UPDATE no action;--> statement-breakpoint
CREATE INDEX "audit_event_thing" ON "audit_event" USING btree ("shop_id","thing","thing_id","at");--> statement-breakpoint
CREATE INDEX "audit_event_shop_time" ON "audit_event" USING btree ("shop_id","at");--> statement-breakpoint
CREATE UNIQUE INDEX "invitation_token_unique" ON "invitation" USING btree ("token_hash");--> statement-breakpoint
CREATE UNIQUE INDEX "invitation_one_open" ON "invitation" USING btree ("shop_id","email") WHERE "invitation"."accepted_at" is null and "invitation"."revoked_at" is null;--> statement-breakpoint
CREATE INDEX "membership_user" ON "membership" USING btree ("user_id");--> statement-breakpoint
CREATE UNIQUE INDEX "password_reset_token_unique" ON "password_reset" USING btree ("token_hash");--> statement-breakpoint
CREATE INDEX "session_expire" ON "session" USING btree ("expire");--> statement-breakpoint
CREATE UNIQUE INDEX "shop_one_demo" ON "shop" USING btree ("demo") WHERE "shop"."demo";--> statement-breakpoint
CREATE UNIQUE INDEX "sign_up_token_unique" ON "sign_up" USING btree ("token_hash");--> statement-breakpoint
CREATE UNIQUE INDEX "user_email_unique" ON "user" USING btree ("email");--> statement-breakpoint
CREATE UNIQUE INDEX "lot_code_unique" ON "lot" USING btree ("shop_id","resin_id",lower("code")) WHERE "lot"."retired_at" is null;--> statement-breakpoint
CREATE INDEX "pairing_resin" ON "pairing" USING btree ("shop_id","resin_id");--> statement-breakpoint
CREATE UNIQUE INDEX "printer_name_unique" ON "printer" USING btree ("shop_id",lower("name")) WHERE "printer"."retired_at" is null;--> statement-breakpoint
CREATE UNIQUE INDEX "resin_name_unique" ON "resin" USING btree ("shop_id",lower("name")) WHERE "resin"."retired_at" is null;--> statement-breakpoint
CREATE UNIQUE INDEX "film_reading_cell" ON "film_reading" USING btree ("study_id","exposure","replicate") WHERE "film_reading"."withdrawn_at" is null;--> statement-breakpoint
CREATE INDEX "film_reading_batch" ON "film_reading" USING btree ("import_batch_id") WHERE "film_reading"."import_batch_id" is not null;--> statement-breakpoint
CREATE INDEX "import_batch_study" ON "import_batch" USING btree ("shop_id","study_id","imported_at");--> statement-breakpoint
CREATE INDEX "study_shop_updated" ON "study" USING btree ("shop_id","updated_at");--> statement-breakpoint
CREATE INDEX "study_pairing" ON "study" USING btree ("shop_id","pairing_id");