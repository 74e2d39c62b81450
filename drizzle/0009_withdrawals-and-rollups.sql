CREATE TABLE `import_withdrawal` (
	`id` bigint unsigned AUTO_INCREMENT NOT NULL,
	`import_id` bigint unsigned NOT NULL,
	`open_import_id` bigint unsigned,
	`state` varchar(8) NOT NULL,
	`reason` varchar(1000) NOT NULL,
	`asked_by` bigint unsigned NOT NULL,
	`asked_at` datetime(3) NOT NULL,
	`agreed_by` bigint unsigned,
	`agreed_at` datetime(3),
	`closed_by` bigint unsigned,
	`closed_at` datetime(3),
	`refusal` varchar(1000) NOT NULL DEFAULT '',
	CONSTRAINT `import_withdrawal_id` PRIMARY KEY(`id`),
	CONSTRAINT `import_withdrawal_open_uq` UNIQUE(`open_import_id`)
);
--> statement-breakpoint
CREATE TABLE `reading_aside` (
	`import_id` int unsigned NOT NULL,
	`channel_id` int unsigned NOT NULL,
	`at` datetime(3) NOT NULL,
	`seq` tinyint unsigned NOT NULL,
	`value` double,
	`bound` double,
	`quality` tinyint unsigned NOT NULL,
	`marks` tinyint unsigned NOT NULL,
	`line_no` int unsigned NOT NULL,
	CONSTRAINT `reading_aside_pk` PRIMARY KEY(`import_id`,`channel_id`,`at`,`line_no`)
);
--> statement-breakpoint
CREATE TABLE `rollup` (
	`channel_id` int unsigned NOT NULL,
	`level_seconds` mediumint unsigned NOT NULL,
	`at` datetime(3) NOT NULL,
	`usable` mediumint unsigned NOT NULL,
	`min_value` double,
	`max_value` double,
	`sum_value` double NOT NULL,
	`positive` mediumint unsigned NOT NULL,
	`min_positive` double,
	`sum_ln` double NOT NULL,
	`n_good` mediumint unsigned NOT NULL,
	`n_over_range` mediumint unsigned NOT NULL,
	`n_under_range` mediumint unsigned NOT NULL,
	`n_off` mediumint unsigned NOT NULL,
	`n_starting` mediumint unsigned NOT NULL,
	`n_degas` mediumint unsigned NOT NULL,
	`n_fault` mediumint unsigned NOT NULL,
	`n_no_signal` mediumint unsigned NOT NULL,
	`n_suspect` mediumint unsigned NOT NULL,
	`n_manual` mediumint unsigned NOT NULL,
	CONSTRAINT `rollup_pk` PRIMARY KEY(`channel_id`,`level_seconds`,`at`)
);
--> statement-breakpoint
CREATE TABLE `rollup_due` (
	`id` bigint unsigned AUTO_INCREMENT NOT NULL,
	`channel_id` int unsigned NOT NULL,
	`from_at` datetime(3) NOT NULL,
	`to_at` datetime(3) NOT NULL,
	CONSTRAINT `rollup_due_id` PRIMARY KEY(`id`)
);
--> statement-breakpoint
ALTER TABLE `import_file` ADD `bytes_done` bigint unsigned DEFAULT 0 NOT NULL;--> statement-breakpoint
ALTER TABLE `import_file` ADD `taking_in_by` bigint unsigned;--> statement-breakpoint
ALTER TABLE `import_file` ADD `fault` varchar(1000) DEFAULT '' NOT NULL;--> statement-breakpoint
ALTER TABLE `import_withdrawal` ADD CONSTRAINT `import_withdrawal_import_id_import_file_id_fk` FOREIGN KEY (`import_id`) REFERENCES `import_file`(`id`) ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `import_withdrawal` ADD CONSTRAINT `import_withdrawal_asked_by_person_id_fk` FOREIGN KEY (`asked_by`) REFERENCES `person`(`id`) ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `import_withdrawal` ADD CONSTRAINT `import_withdrawal_agreed_by_person_id_fk` FOREIGN KEY (`agreed_by`) REFERENCES `person`(`id`) ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `import_withdrawal` ADD CONSTRAINT `import_withdrawal_closed_by_person_id_fk` FOREIGN KEY (`closed_by`) REFERENCES `person`(`id`) ON DELETE no action ON UPDATE no action;--> statement-breakpoint
CREATE INDEX `import_withdrawal_import_ix` ON `import_withdrawal` (`import_id`);--> statement-breakpoint
CREATE INDEX `reading_aside_instant_ix` ON `reading_aside` (`channel_id`,`at`);--> statement-breakpoint
CREATE INDEX `rollup_due_channel_ix` ON `rollup_due` (`channel_id`,`from_at`);--> statement-breakpoint
ALTER TABLE `import_file` ADD CONSTRAINT `import_file_taking_in_by_person_id_fk` FOREIGN KEY (`taking_in_by`) REFERENCES `person`(`id`) ON DELETE no action ON UPDATE no action;--> statement-breakpoint
INSERT INTO `rollup_due` (`channel_id`, `from_at`, `to_at`) SELECT `channel_id`, MIN(`at`), MAX(`at`) FROM `reading` GROUP BY `channel_id`;
