CREATE TABLE `api_post` (
	`id` bigint unsigned AUTO_INCREMENT NOT NULL,
	`token_id` bigint unsigned NOT NULL,
	`request_key` varchar(120) NOT NULL,
	`source_id` bigint unsigned NOT NULL,
	`body_sha256` varchar(64) NOT NULL,
	`import_id` bigint unsigned,
	`answer` json,
	`received_at` datetime(3) NOT NULL,
	CONSTRAINT `api_post_id` PRIMARY KEY(`id`),
	CONSTRAINT `api_post_key_uq` UNIQUE(`token_id`,`request_key`)
);
--> statement-breakpoint
CREATE TABLE `api_token` (
	`id` bigint unsigned AUTO_INCREMENT NOT NULL,
	`name` varchar(80) NOT NULL,
	`token_hash` varchar(64) NOT NULL,
	`created_by` bigint unsigned,
	`created_at` datetime(3) NOT NULL,
	`ends_at` datetime(3) NOT NULL,
	`revoked_by` bigint unsigned,
	`revoked_at` datetime(3),
	`revoke_reason` varchar(500),
	`last_used_at` datetime(3),
	CONSTRAINT `api_token_id` PRIMARY KEY(`id`),
	CONSTRAINT `api_token_hash_uq` UNIQUE(`token_hash`)
);
--> statement-breakpoint
CREATE TABLE `api_token_source` (
	`token_id` bigint unsigned NOT NULL,
	`source_id` bigint unsigned NOT NULL,
	CONSTRAINT `api_token_source_pk` PRIMARY KEY(`token_id`,`source_id`)
);
--> statement-breakpoint
CREATE TABLE `typed_reading` (
	`id` bigint unsigned AUTO_INCREMENT NOT NULL,
	`position_id` bigint unsigned NOT NULL,
	`channel_id` bigint unsigned NOT NULL,
	`at` datetime(3) NOT NULL,
	`seq` int unsigned NOT NULL,
	`value_text` varchar(40) NOT NULL,
	`unit` varchar(24) NOT NULL,
	`instrument_id` bigint unsigned,
	`instrument_text` varchar(80) NOT NULL,
	`note` varchar(500) NOT NULL DEFAULT '',
	`typed_by` bigint unsigned NOT NULL,
	`typed_at` datetime(3) NOT NULL,
	CONSTRAINT `typed_reading_id` PRIMARY KEY(`id`)
);
--> statement-breakpoint
ALTER TABLE `import_file` ADD `arrival` varchar(8) DEFAULT 'file' NOT NULL;--> statement-breakpoint
ALTER TABLE `api_post` ADD CONSTRAINT `api_post_token_id_api_token_id_fk` FOREIGN KEY (`token_id`) REFERENCES `api_token`(`id`) ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `api_post` ADD CONSTRAINT `api_post_source_id_source_id_fk` FOREIGN KEY (`source_id`) REFERENCES `source`(`id`) ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `api_post` ADD CONSTRAINT `api_post_import_id_import_file_id_fk` FOREIGN KEY (`import_id`) REFERENCES `import_file`(`id`) ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `api_token` ADD CONSTRAINT `api_token_created_by_person_id_fk` FOREIGN KEY (`created_by`) REFERENCES `person`(`id`) ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `api_token` ADD CONSTRAINT `api_token_revoked_by_person_id_fk` FOREIGN KEY (`revoked_by`) REFERENCES `person`(`id`) ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `api_token_source` ADD CONSTRAINT `api_token_source_token_id_api_token_id_fk` FOREIGN KEY (`token_id`) REFERENCES `api_token`(`id`) ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `api_token_source` ADD CONSTRAINT `api_token_source_source_id_source_id_fk` FOREIGN KEY (`source_id`) REFERENCES `source`(`id`) ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `typed_reading` ADD CONSTRAINT `typed_reading_position_id_position_id_fk` FOREIGN KEY (`position_id`) REFERENCES `position`(`id`) ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `typed_reading` ADD CONSTRAINT `typed_reading_channel_id_channel_id_fk` FOREIGN KEY (`channel_id`) REFERENCES `channel`(`id`) ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `typed_reading` ADD CONSTRAINT `typed_reading_instrument_id_instrument_id_fk` FOREIGN KEY (`instrument_id`) REFERENCES `instrument`(`id`) ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `typed_reading` ADD CONSTRAINT `typed_reading_typed_by_person_id_fk` FOREIGN KEY (`typed_by`) REFERENCES `person`(`id`) ON DELETE no action ON UPDATE no action;--> statement-breakpoint
CREATE INDEX `api_post_received_ix` ON `api_post` (`received_at`);--> statement-breakpoint
CREATE INDEX `typed_reading_position_ix` ON `typed_reading` (`position_id`,`at`);