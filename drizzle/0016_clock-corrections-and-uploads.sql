CREATE TABLE `upload` (
	`id` bigint unsigned AUTO_INCREMENT NOT NULL,
	`token` varchar(43) NOT NULL,
	`person_id` bigint unsigned NOT NULL,
	`source_code` varchar(20) NOT NULL DEFAULT '',
	`file_name` varchar(255) NOT NULL,
	`byte_size` bigint unsigned NOT NULL,
	`attachment_id` bigint unsigned NOT NULL,
	`received_bytes` bigint unsigned NOT NULL DEFAULT 0,
	`created_at` datetime(3) NOT NULL,
	`last_at` datetime(3) NOT NULL,
	`import_id` bigint unsigned,
	CONSTRAINT `upload_id` PRIMARY KEY(`id`),
	CONSTRAINT `upload_token_uq` UNIQUE(`token`)
);
--> statement-breakpoint
CREATE TABLE `clock_correction` (
	`id` bigint unsigned AUTO_INCREMENT NOT NULL,
	`source_id` bigint unsigned NOT NULL,
	`starts_at` datetime(3) NOT NULL,
	`ends_at` datetime(3) NOT NULL,
	`start_ms` int NOT NULL,
	`end_ms` int NOT NULL,
	`basis` varchar(1000) NOT NULL,
	`recorded_by` bigint unsigned NOT NULL,
	`recorded_at` datetime(3) NOT NULL,
	`replaced_at` datetime(3),
	`replaced_by` bigint unsigned,
	`replace_reason` varchar(500) NOT NULL DEFAULT '',
	CONSTRAINT `clock_correction_id` PRIMARY KEY(`id`)
);
--> statement-breakpoint
ALTER TABLE `upload` ADD CONSTRAINT `upload_person_id_person_id_fk` FOREIGN KEY (`person_id`) REFERENCES `person`(`id`) ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `upload` ADD CONSTRAINT `upload_attachment_id_attachment_id_fk` FOREIGN KEY (`attachment_id`) REFERENCES `attachment`(`id`) ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `upload` ADD CONSTRAINT `upload_import_id_import_file_id_fk` FOREIGN KEY (`import_id`) REFERENCES `import_file`(`id`) ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `clock_correction` ADD CONSTRAINT `clock_correction_source_id_source_id_fk` FOREIGN KEY (`source_id`) REFERENCES `source`(`id`) ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `clock_correction` ADD CONSTRAINT `clock_correction_recorded_by_person_id_fk` FOREIGN KEY (`recorded_by`) REFERENCES `person`(`id`) ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `clock_correction` ADD CONSTRAINT `clock_correction_replaced_by_person_id_fk` FOREIGN KEY (`replaced_by`) REFERENCES `person`(`id`) ON DELETE no action ON UPDATE no action;--> statement-breakpoint
CREATE INDEX `upload_last_ix` ON `upload` (`last_at`);--> statement-breakpoint
CREATE INDEX `clock_correction_ix` ON `clock_correction` (`source_id`,`starts_at`);