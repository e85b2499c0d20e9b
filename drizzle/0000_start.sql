CREATE TABLE `conditions` (
	`id` text PRIMARY KEY NOT NULL,
	`study_id` text NOT NULL,
	`name` text NOT NULL,
	`position` integer NOT NULL,
	`level` real,
	`level_unit` text,
	`is_baseline` integer DEFAULT false NOT NULL,
	`is_active` integer DEFAULT false NOT NULL,
	FOREIGN KEY (`study_id`) REFERENCES `studies`(`id`) ON UPDATE no action ON DELETE no action
);
--> statement-breakpoint
CREATE UNIQUE INDEX `conditions_name` ON `conditions` (`study_id`,`name`);--> statement-breakpoint
CREATE TABLE `events` (
	`sequence` integer PRIMARY KEY AUTOINCREMENT NOT NULL,
	`at` integer NOT NULL,
	`lab_id` text,
	`person_id` text,
	`kind` text NOT NULL,
	`object_type` text NOT NULL,
	`object_id` text NOT NULL,
	`detail` text NOT NULL,
	`hash` text NOT NULL,
	FOREIGN KEY (`lab_id`) REFERENCES `labs`(`id`) ON UPDATE no action ON DELETE no action,
	FOREIGN KEY (`person_id`) REFERENCES `people`(`id`) ON UPDATE no action ON DELETE no action
);
--> statement-breakpoint
CREATE UNIQUE INDEX `events_hash` ON `events` (`hash`);--> statement-breakpoint
CREATE INDEX `events_lab` ON `events` (`lab_id`,`sequence`);--> statement-breakpoint
CREATE INDEX `events_object` ON `events` (`object_type`,`object_id`,`kind`);--> statement-breakpoint
CREATE TABLE `fit_windows` (
	`fit_id` text NOT NULL,
	`position` integer NOT NULL,
	`axis` text NOT NULL,
	`onset_s` real NOT NULL,
	`window_start_ms` real NOT NULL,
	`window_end_ms` real NOT NULL,
	`included` integer NOT NULL,
	`reason` text,
	`origin` text NOT NULL,
	`edited_by` text,
	`edited_at` integer,
	PRIMARY KEY(`fit_id`, `position`),
	FOREIGN KEY (`fit_id`) REFERENCES `fits`(`id`) ON UPDATE no action ON DELETE no action,
	FOREIGN KEY (`edited_by`) REFERENCES `people`(`id`) ON UPDATE no action ON DELETE no action
);
--> statement-breakpoint
CREATE TABLE `fits` (
	`id` text PRIMARY KEY NOT NULL,
	`lab_id` text NOT NULL,
	`recording_id` text NOT NULL,
	`protocol_id` text NOT NULL,
	`number` integer NOT NULL,
	`state` text NOT NULL,
	`verification` text NOT NULL,
	`verification_note` text,
	`protocol_document` text NOT NULL,
	`protocol_sha256` text NOT NULL,
	`result` text NOT NULL,
	`engine` text NOT NULL,
	`saved_by` text NOT NULL,
	`saved_at` integer NOT NULL,
	`superseded_by` text,
	`superseded_at` integer,
	`version` integer DEFAULT 1 NOT NULL,
	FOREIGN KEY (`lab_id`) REFERENCES `labs`(`id`) ON UPDATE no action ON DELETE no action,
	FOREIGN KEY (`recording_id`) REFERENCES `recordings`(`id`) ON UPDATE no action ON DELETE no action,
	FOREIGN KEY (`protocol_id`) REFERENCES `protocols`(`id`) ON UPDATE no action ON DELETE no action,
	FOREIGN KEY (`saved_by`) REFERENCES `people`(`id`) ON UPDATE no action ON DELETE no action,
	CONSTRAINT "fits_state_word" CHECK("fits"."state" in ('draft', 'submitted', 'returned', 'approved'))
);
--> statement-breakpoint
CREATE UNIQUE INDEX `fits_number` ON `fits` (`recording_id`,`number`);--> statement-breakpoint
CREATE UNIQUE INDEX `fits_current` ON `fits` (`recording_id`) WHERE "fits"."superseded_at" is null;--> statement-breakpoint
CREATE INDEX `fits_state` ON `fits` (`lab_id`,`state`);--> statement-breakpoint
CREATE TABLE `labs` (
	`id` text PRIMARY KEY NOT NULL,
	`name` text NOT NULL,
	`created_at` integer NOT NULL
);
--> statement-breakpoint
CREATE TABLE `membership_roles` (
	`membership_id` text NOT NULL,
	`role` text NOT NULL,
	PRIMARY KEY(`membership_id`, `role`),
	FOREIGN KEY (`membership_id`) REFERENCES `memberships`(`id`) ON UPDATE no action ON DELETE no action,
	CONSTRAINT "membership_roles_role" CHECK("membership_roles"."role" in ('biomechanist', 'analyst', 'reviewer', 'manager'))
);
--> statement-breakpoint
CREATE TABLE `memberships` (
	`id` text PRIMARY KEY NOT NULL,
	`lab_id` text NOT NULL,
	`person_id` text NOT NULL,
	`created_at` integer NOT NULL,
	`ended_at` integer,
	FOREIGN KEY (`lab_id`) REFERENCES `labs`(`id`) ON UPDATE no action ON DELETE no action,
	FOREIGN KEY (`person_id`) REFERENCES `people`(`id`) ON UPDATE no action ON DELETE no action
);
--> statement-breakpoint
CREATE UNIQUE INDEX `memberships_lab_person` ON `memberships` (`lab_id`,`person_id`);--> statement-breakpoint
CREATE INDEX `memberships_person` ON `memberships` (`person_id`);--> statement-breakpoint
CREATE TABLE `participants` (
	`id` text PRIMARY KEY NOT NULL,
	`study_id` text NOT NULL,
	`code` text NOT NULL,
	`tested_side` text NOT NULL,
	`body_mass_kg` real,
	`height_m` real,
	`version` integer DEFAULT 1 NOT NULL,
	`created_at` integer NOT NULL,
	FOREIGN KEY (`study_id`) REFERENCES `studies`(`id`) ON UPDATE no action ON DELETE no action,
	CONSTRAINT "participants_side" CHECK("participants"."tested_side" in ('left', 'right'))
);
--> statement-breakpoint
CREATE UNIQUE INDEX `participants_code` ON `participants` (`study_id`,`code`);--> statement-breakpoint
CREATE TABLE `people` (
	`id` text PRIMARY KEY NOT NULL,
	`email` text NOT NULL,
	`name` text NOT NULL,
	`password_hash` text NOT NULL,
	`created_at` integer NOT NULL
);
--> statement-breakpoint
CREATE UNIQUE INDEX `people_email` ON `people` (`email`);--> statement-breakpoint
CREATE TABLE `postures` (
	`id` text PRIMARY KEY NOT NULL,
	`study_id` text NOT NULL,
	`name` text NOT NULL,
	`position` integer NOT NULL,
	FOREIGN KEY (`study_id`) REFERENCES `studies`(`id`) ON UPDATE no action ON DELETE no action
);
--> statement-breakpoint
CREATE UNIQUE INDEX `postures_name` ON `postures` (`study_id`,`name`);--> statement-breakpoint
CREATE TABLE `protocols` (
	`id` text PRIMARY KEY NOT NULL,
	`study_id` text NOT NULL,
	`number` integer NOT NULL,
	`kind` text NOT NULL,
	`choices` text NOT NULL,
	`note` text DEFAULT '' NOT NULL,
	`created_by` text NOT NULL,
	`created_at` integer NOT NULL,
	FOREIGN KEY (`study_id`) REFERENCES `studies`(`id`) ON UPDATE no action ON DELETE no action,
	FOREIGN KEY (`created_by`) REFERENCES `people`(`id`) ON UPDATE no action ON DELETE no action
);
--> statement-breakpoint
CREATE UNIQUE INDEX `protocols_number` ON `protocols` (`study_id`,`number`);--> statement-breakpoint
CREATE TABLE `recordings` (
	`id` text PRIMARY KEY NOT NULL,
	`lab_id` text NOT NULL,
	`study_id` text NOT NULL,
	`participant_id` text NOT NULL,
	`condition_id` text NOT NULL,
	`posture_id` text NOT NULL,
	`visit_id` text NOT NULL,
	`kind` text NOT NULL,
	`file_name` text NOT NULL,
	`size_bytes` integer NOT NULL,
	`sha256` text NOT NULL,
	`storage_key` text NOT NULL,
	`state` text NOT NULL,
	`refusal` text,
	`channel_map` text NOT NULL,
	`facts` text,
	`taken_in_by` text NOT NULL,
	`taken_in_at` integer NOT NULL,
	`version` integer DEFAULT 1 NOT NULL,
	FOREIGN KEY (`lab_id`) REFERENCES `labs`(`id`) ON UPDATE no action ON DELETE no action,
	FOREIGN KEY (`study_id`) REFERENCES `studies`(`id`) ON UPDATE no action ON DELETE no action,
	FOREIGN KEY (`participant_id`) REFERENCES `participants`(`id`) ON UPDATE no action ON DELETE no action,
	FOREIGN KEY (`condition_id`) REFERENCES `conditions`(`id`) ON UPDATE no action ON DELETE no action,
	FOREIGN KEY (`posture_id`) REFERENCES `postures`(`id`) ON UPDATE no action ON DELETE no action,
	FOREIGN KEY (`visit_id`) REFERENCES `visits`(`id`) ON UPDATE no action ON DELETE no action,
	FOREIGN KEY (`taken_in_by`) REFERENCES `people`(`id`) ON UPDATE no action ON DELETE no action
);
--> statement-breakpoint
CREATE UNIQUE INDEX `recordings_lab_sha256` ON `recordings` (`lab_id`,`sha256`);--> statement-breakpoint
CREATE INDEX `recordings_study` ON `recordings` (`study_id`);--> statement-breakpoint
CREATE INDEX `recordings_cell` ON `recordings` (`participant_id`,`condition_id`);--> statement-breakpoint
CREATE TABLE `reviews` (
	`id` text PRIMARY KEY NOT NULL,
	`fit_id` text NOT NULL,
	`reviewer_id` text NOT NULL,
	`decision` text NOT NULL,
	`note` text DEFAULT '' NOT NULL,
	`decided_at` integer NOT NULL,
	FOREIGN KEY (`fit_id`) REFERENCES `fits`(`id`) ON UPDATE no action ON DELETE no action,
	FOREIGN KEY (`reviewer_id`) REFERENCES `people`(`id`) ON UPDATE no action ON DELETE no action
);
--> statement-breakpoint
CREATE INDEX `reviews_fit` ON `reviews` (`fit_id`);--> statement-breakpoint
CREATE TABLE `rigs` (
	`id` text PRIMARY KEY NOT NULL,
	`lab_id` text NOT NULL,
	`name` text NOT NULL,
	`channel_map` text,
	`impedance` text,
	`limits` text,
	`version` integer DEFAULT 1 NOT NULL,
	`created_at` integer NOT NULL,
	FOREIGN KEY (`lab_id`) REFERENCES `labs`(`id`) ON UPDATE no action ON DELETE no action
);
--> statement-breakpoint
CREATE UNIQUE INDEX `rigs_lab_name` ON `rigs` (`lab_id`,`name`);--> statement-breakpoint
CREATE TABLE `sessions` (
	`id` text PRIMARY KEY NOT NULL,
	`person_id` text,
	`lab_id` text,
	`data` text DEFAULT '{}' NOT NULL,
	`created_at` integer NOT NULL,
	`last_seen_at` integer NOT NULL,
	`expires_at` integer NOT NULL,
	`revoked_at` integer,
	FOREIGN KEY (`person_id`) REFERENCES `people`(`id`) ON UPDATE no action ON DELETE no action,
	FOREIGN KEY (`lab_id`) REFERENCES `labs`(`id`) ON UPDATE no action ON DELETE no action
);
--> statement-breakpoint
CREATE INDEX `sessions_person` ON `sessions` (`person_id`);--> statement-breakpoint
CREATE TABLE `studies` (
	`id` text PRIMARY KEY NOT NULL,
	`lab_id` text NOT NULL,
	`name` text NOT NULL,
	`origin` text,
	`rig_id` text,
	`file_name_pattern` text,
	`version` integer DEFAULT 1 NOT NULL,
	`created_at` integer NOT NULL,
	FOREIGN KEY (`lab_id`) REFERENCES `labs`(`id`) ON UPDATE no action ON DELETE no action,
	FOREIGN KEY (`rig_id`) REFERENCES `rigs`(`id`) ON UPDATE no action ON DELETE no action
);
--> statement-breakpoint
CREATE UNIQUE INDEX `studies_lab_name` ON `studies` (`lab_id`,`name`);--> statement-breakpoint
CREATE TABLE `study_axes` (
	`id` text PRIMARY KEY NOT NULL,
	`study_id` text NOT NULL,
	`name` text NOT NULL,
	`label` text NOT NULL,
	`positive` text NOT NULL,
	`negative` text NOT NULL,
	`position` integer NOT NULL,
	FOREIGN KEY (`study_id`) REFERENCES `studies`(`id`) ON UPDATE no action ON DELETE no action
);
--> statement-breakpoint
CREATE UNIQUE INDEX `study_axes_name` ON `study_axes` (`study_id`,`name`);--> statement-breakpoint
CREATE TABLE `uploads` (
	`id` text PRIMARY KEY NOT NULL,
	`lab_id` text NOT NULL,
	`study_id` text NOT NULL,
	`person_id` text NOT NULL,
	`file_name` text NOT NULL,
	`size_bytes` integer NOT NULL,
	`sha256` text NOT NULL,
	`storage_key` text NOT NULL,
	`multipart_id` text,
	`state` text NOT NULL,
	`created_at` integer NOT NULL,
	`ended_at` integer,
	FOREIGN KEY (`lab_id`) REFERENCES `labs`(`id`) ON UPDATE no action ON DELETE no action,
	FOREIGN KEY (`study_id`) REFERENCES `studies`(`id`) ON UPDATE no action ON DELETE no action,
	FOREIGN KEY (`person_id`) REFERENCES `people`(`id`) ON UPDATE no action ON DELETE no action
);
--> statement-breakpoint
CREATE INDEX `uploads_person` ON `uploads` (`person_id`,`state`);--> statement-breakpoint
CREATE TABLE `visits` (
	`id` text PRIMARY KEY NOT NULL,
	`participant_id` text NOT NULL,
	`rig_id` text NOT NULL,
	`day` text NOT NULL,
	`geometry` text DEFAULT '{}' NOT NULL,
	`version` integer DEFAULT 1 NOT NULL,
	`created_at` integer NOT NULL,
	FOREIGN KEY (`participant_id`) REFERENCES `participants`(`id`) ON UPDATE no action ON DELETE no action,
	FOREIGN KEY (`rig_id`) REFERENCES `rigs`(`id`) ON UPDATE no action ON DELETE no action
);
--> statement-breakpoint
CREATE UNIQUE INDEX `visits_participant_day` ON `visits` (`participant_id`,`rig_id`,`day`);