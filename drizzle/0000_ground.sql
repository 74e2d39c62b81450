CREATE TABLE `import_file` (
	`id` bigint unsigned AUTO_INCREMENT NOT NULL,
	`state` varchar(16) NOT NULL,
	`source_id` bigint unsigned,
	`file_name` varchar(255) NOT NULL,
	`byte_size` bigint unsigned NOT NULL,
	`sha256` varchar(64) NOT NULL,
	`accepted_sha256` varchar(64),
	`attachment_id` bigint unsigned,
	`uploaded_by` bigint unsigned,
	`uploaded_at` datetime(3) NOT NULL,
	`profile_version` int,
	`read_out` json,
	`line_count` int,
	`reading_count` int,
	`held_count` int,
	`conflict_count` int,
	`first_at` datetime(3),
	`last_at` datetime(3),
	`decided_by` bigint unsigned,
	`decided_at` datetime(3),
	`reason` varchar(1000) NOT NULL DEFAULT '',
	`revision` int NOT NULL DEFAULT 1,
	CONSTRAINT `import_file_id` PRIMARY KEY(`id`),
	CONSTRAINT `import_file_accepted_uq` UNIQUE(`accepted_sha256`)
);
--> statement-breakpoint
CREATE TABLE `log_amendment` (
	`id` bigint unsigned AUTO_INCREMENT NOT NULL,
	`entry_id` bigint unsigned NOT NULL,
	`text` text NOT NULL,
	`reason` varchar(500) NOT NULL,
	`written_at` datetime(3) NOT NULL,
	`author_id` bigint unsigned NOT NULL,
	`signed_act_id` bigint unsigned NOT NULL,
	CONSTRAINT `log_amendment_id` PRIMARY KEY(`id`)
);
--> statement-breakpoint
CREATE TABLE `log_entry` (
	`id` bigint unsigned AUTO_INCREMENT NOT NULL,
	`segment_id` bigint unsigned,
	`kind` varchar(16) NOT NULL,
	`event_at` datetime(3) NOT NULL,
	`written_at` datetime(3) NOT NULL,
	`text` text NOT NULL,
	`author_id` bigint unsigned NOT NULL,
	`on_chart` boolean NOT NULL DEFAULT false,
	`signed_act_id` bigint unsigned,
	CONSTRAINT `log_entry_id` PRIMARY KEY(`id`)
);
--> statement-breakpoint
CREATE TABLE `person` (
	`id` bigint unsigned AUTO_INCREMENT NOT NULL,
	`name` varchar(120) NOT NULL,
	`email` varchar(254),
	`password_hash` varchar(255),
	`note` varchar(500) NOT NULL DEFAULT '',
	`ends_at` datetime(3),
	`pressure_unit` varchar(8) NOT NULL DEFAULT 'Pa',
	`theme` varchar(8) NOT NULL DEFAULT 'system',
	`created_at` datetime(3) NOT NULL,
	CONSTRAINT `person_id` PRIMARY KEY(`id`),
	CONSTRAINT `person_email_uq` UNIQUE(`email`),
	CONSTRAINT `person_name_uq` UNIQUE(`name`)
);
--> statement-breakpoint
CREATE TABLE `role_grant` (
	`id` bigint unsigned AUTO_INCREMENT NOT NULL,
	`person_id` bigint unsigned NOT NULL,
	`role` varchar(20) NOT NULL,
	`starts_at` datetime(3) NOT NULL,
	`ends_at` datetime(3),
	`granted_by` bigint unsigned,
	`granted_at` datetime(3) NOT NULL,
	`reason` varchar(500) NOT NULL,
	`confirmed_by` bigint unsigned,
	`confirmed_at` datetime(3),
	`revoked_by` bigint unsigned,
	`revoked_at` datetime(3),
	`revoke_reason` varchar(500),
	CONSTRAINT `role_grant_id` PRIMARY KEY(`id`)
);
--> statement-breakpoint
CREATE TABLE `session` (
	`token_hash` varchar(64) NOT NULL,
	`person_id` bigint unsigned NOT NULL,
	`created_at` datetime(3) NOT NULL,
	`last_seen_at` datetime(3) NOT NULL,
	`expires_at` datetime(3) NOT NULL,
	`user_agent` varchar(255) NOT NULL DEFAULT '',
	`shared` boolean NOT NULL DEFAULT false,
	CONSTRAINT `session_token_hash` PRIMARY KEY(`token_hash`)
);
--> statement-breakpoint
CREATE TABLE `import_range` (
	`import_id` bigint unsigned NOT NULL,
	`channel_id` bigint unsigned NOT NULL,
	`first_at` datetime(3) NOT NULL,
	`last_at` datetime(3) NOT NULL,
	`reading_count` int NOT NULL,
	CONSTRAINT `import_range_pk` PRIMARY KEY(`import_id`,`channel_id`)
);
--> statement-breakpoint
CREATE TABLE `reading` (
	`channel_id` int unsigned NOT NULL,
	`at` datetime(3) NOT NULL,
	`seq` tinyint unsigned NOT NULL DEFAULT 0,
	`value` double,
	`bound` double,
	`quality` tinyint unsigned NOT NULL,
	`marks` tinyint unsigned NOT NULL DEFAULT 0,
	`import_id` int unsigned NOT NULL,
	`line_no` int unsigned NOT NULL,
	CONSTRAINT `reading_pk` PRIMARY KEY(`channel_id`,`at`,`seq`)
);
--> statement-breakpoint
CREATE TABLE `channel` (
	`id` bigint unsigned AUTO_INCREMENT NOT NULL,
	`source_id` bigint unsigned NOT NULL,
	`name` varchar(80) NOT NULL,
	`name_key` varchar(80) NOT NULL,
	`quantity` varchar(16) NOT NULL,
	`basis` varchar(40) NOT NULL DEFAULT 'nitrogen-equivalent',
	`ignored_since` datetime(3),
	CONSTRAINT `channel_id` PRIMARY KEY(`id`),
	CONSTRAINT `channel_name_uq` UNIQUE(`source_id`,`name_key`)
);
--> statement-breakpoint
CREATE TABLE `channel_map` (
	`id` bigint unsigned AUTO_INCREMENT NOT NULL,
	`channel_id` bigint unsigned NOT NULL,
	`position_id` bigint unsigned NOT NULL,
	`starts_at` datetime(3) NOT NULL,
	`ends_at` datetime(3),
	`reason` varchar(500) NOT NULL,
	`recorded_by` bigint unsigned,
	`recorded_at` datetime(3) NOT NULL,
	`replaced_at` datetime(3),
	CONSTRAINT `channel_map_id` PRIMARY KEY(`id`)
);
--> statement-breakpoint
CREATE TABLE `equipment` (
	`id` bigint unsigned AUTO_INCREMENT NOT NULL,
	`tag` varchar(20) NOT NULL,
	`kind` varchar(40) NOT NULL,
	`facts` varchar(500) NOT NULL,
	`calibration_due` datetime(3),
	CONSTRAINT `equipment_id` PRIMARY KEY(`id`),
	CONSTRAINT `equipment_tag_uq` UNIQUE(`tag`)
);
--> statement-breakpoint
CREATE TABLE `fitting` (
	`id` bigint unsigned AUTO_INCREMENT NOT NULL,
	`position_id` bigint unsigned NOT NULL,
	`instrument_id` bigint unsigned NOT NULL,
	`starts_at` datetime(3) NOT NULL,
	`ends_at` datetime(3),
	`factor` double NOT NULL DEFAULT 1,
	`reason` varchar(500) NOT NULL,
	`recorded_by` bigint unsigned,
	`recorded_at` datetime(3) NOT NULL,
	`replaced_at` datetime(3),
	CONSTRAINT `fitting_id` PRIMARY KEY(`id`)
);
--> statement-breakpoint
CREATE TABLE `heater_circuit` (
	`id` bigint unsigned AUTO_INCREMENT NOT NULL,
	`tag` varchar(12) NOT NULL,
	`kind` varchar(16) NOT NULL,
	`segment_id` bigint unsigned,
	`power_w` double,
	`volts` double,
	`earthing` varchar(120) NOT NULL DEFAULT '',
	`note` varchar(500) NOT NULL DEFAULT '',
	`revision` int NOT NULL DEFAULT 1,
	CONSTRAINT `heater_circuit_id` PRIMARY KEY(`id`),
	CONSTRAINT `heater_circuit_tag_uq` UNIQUE(`tag`)
);
--> statement-breakpoint
CREATE TABLE `instrument` (
	`id` bigint unsigned AUTO_INCREMENT NOT NULL,
	`serial` varchar(40) NOT NULL,
	`kind` varchar(24) NOT NULL,
	`quantity` varchar(16) NOT NULL,
	`range_min` double,
	`range_max` double,
	`calibration_due` datetime(3),
	`certificate` varchar(80) NOT NULL DEFAULT '',
	`note` varchar(500) NOT NULL DEFAULT '',
	`revision` int NOT NULL DEFAULT 1,
	CONSTRAINT `instrument_id` PRIMARY KEY(`id`),
	CONSTRAINT `instrument_serial_uq` UNIQUE(`serial`)
);
--> statement-breakpoint
CREATE TABLE `limit_value` (
	`id` bigint unsigned AUTO_INCREMENT NOT NULL,
	`kind` varchar(32) NOT NULL,
	`segment_id` bigint unsigned,
	`value` double NOT NULL,
	`unit` varchar(16) NOT NULL,
	`starts_at` datetime(3) NOT NULL,
	`ends_at` datetime(3),
	`reason` varchar(500) NOT NULL,
	`set_by` bigint unsigned,
	`recorded_at` datetime(3) NOT NULL,
	`replaced_at` datetime(3),
	CONSTRAINT `limit_value_id` PRIMARY KEY(`id`)
);
--> statement-breakpoint
CREATE TABLE `line` (
	`id` bigint unsigned AUTO_INCREMENT NOT NULL,
	`code` varchar(20) NOT NULL,
	`name` varchar(120) NOT NULL,
	`length_m` double NOT NULL,
	`joins_line_id` bigint unsigned,
	`joins_at_m` double,
	`sort_order` smallint NOT NULL,
	CONSTRAINT `line_id` PRIMARY KEY(`id`),
	CONSTRAINT `line_code_uq` UNIQUE(`code`)
);
--> statement-breakpoint
CREATE TABLE `position` (
	`id` bigint unsigned AUTO_INCREMENT NOT NULL,
	`tag` varchar(20) NOT NULL,
	`kind` varchar(24) NOT NULL,
	`quantity` varchar(16) NOT NULL,
	`segment_id` bigint unsigned,
	`line_id` bigint unsigned,
	`chainage_m` double,
	`label` varchar(80) NOT NULL DEFAULT '',
	`retired_at` datetime(3),
	`revision` int NOT NULL DEFAULT 1,
	CONSTRAINT `position_id` PRIMARY KEY(`id`),
	CONSTRAINT `position_tag_uq` UNIQUE(`tag`)
);
--> statement-breakpoint
CREATE TABLE `pump` (
	`id` bigint unsigned AUTO_INCREMENT NOT NULL,
	`tag` varchar(12) NOT NULL,
	`kind` varchar(24) NOT NULL,
	`speeds` json NOT NULL,
	`ultimate_pa` double NOT NULL DEFAULT 0,
	`note` varchar(500) NOT NULL DEFAULT '',
	`revision` int NOT NULL DEFAULT 1,
	CONSTRAINT `pump_id` PRIMARY KEY(`id`),
	CONSTRAINT `pump_tag_uq` UNIQUE(`tag`)
);
--> statement-breakpoint
CREATE TABLE `pump_placement` (
	`id` bigint unsigned AUTO_INCREMENT NOT NULL,
	`pump_id` bigint unsigned NOT NULL,
	`segment_id` bigint unsigned NOT NULL,
	`offset_m` double NOT NULL,
	`starts_at` datetime(3) NOT NULL,
	`ends_at` datetime(3),
	`reason` varchar(500) NOT NULL,
	CONSTRAINT `pump_placement_id` PRIMARY KEY(`id`)
);
--> statement-breakpoint
CREATE TABLE `segment` (
	`id` bigint unsigned AUTO_INCREMENT NOT NULL,
	`line_id` bigint unsigned NOT NULL,
	`tag` varchar(12) NOT NULL,
	`start_m` double NOT NULL,
	`end_m` double NOT NULL,
	`inner_diameter_m` double NOT NULL,
	`wall_m` double NOT NULL,
	`steel` varchar(20) NOT NULL,
	`vacuum_fired` boolean NOT NULL,
	`last_bake_year` smallint,
	`hydrogen_model` varchar(16) NOT NULL,
	`hydrogen_c0` double,
	`hydrogen_q20` double,
	`hydrogen_origin` varchar(300) NOT NULL,
	`water_capacity` double NOT NULL,
	`water_origin` varchar(300) NOT NULL,
	`bellows_count` smallint NOT NULL,
	`bellows_travel_mm` double NOT NULL,
	`bellows_rated_mm` double NOT NULL,
	`insulation_m` double NOT NULL,
	`insulation_w_per_m_k` double NOT NULL,
	`resistance_20_ohm` double NOT NULL,
	`sort_order` smallint NOT NULL,
	`revision` int NOT NULL DEFAULT 1,
	CONSTRAINT `segment_id` PRIMARY KEY(`id`),
	CONSTRAINT `segment_tag_uq` UNIQUE(`tag`)
);
--> statement-breakpoint
CREATE TABLE `segment_state` (
	`id` bigint unsigned AUTO_INCREMENT NOT NULL,
	`segment_id` bigint unsigned NOT NULL,
	`state` varchar(20) NOT NULL,
	`since` datetime(3) NOT NULL,
	`ended_at` datetime(3),
	`reason` varchar(1000) NOT NULL,
	`set_by` bigint unsigned NOT NULL,
	`recorded_at` datetime(3) NOT NULL,
	CONSTRAINT `segment_state_id` PRIMARY KEY(`id`)
);
--> statement-breakpoint
CREATE TABLE `site` (
	`id` bigint unsigned AUTO_INCREMENT NOT NULL,
	`code` varchar(12) NOT NULL,
	`name` varchar(120) NOT NULL,
	`time_zone` varchar(64) NOT NULL,
	`ambient_c` double NOT NULL,
	CONSTRAINT `site_id` PRIMARY KEY(`id`)
);
--> statement-breakpoint
CREATE TABLE `source` (
	`id` bigint unsigned AUTO_INCREMENT NOT NULL,
	`code` varchar(20) NOT NULL,
	`name` varchar(120) NOT NULL,
	`due_at` varchar(5) NOT NULL DEFAULT '07:00',
	`period_seconds` int NOT NULL,
	`profile` json,
	`profile_version` int NOT NULL DEFAULT 0,
	`off_since` datetime(3),
	`note` varchar(500) NOT NULL DEFAULT '',
	`revision` int NOT NULL DEFAULT 1,
	CONSTRAINT `source_id` PRIMARY KEY(`id`),
	CONSTRAINT `source_code_uq` UNIQUE(`code`)
);
--> statement-breakpoint
CREATE TABLE `supply_set` (
	`id` bigint unsigned AUTO_INCREMENT NOT NULL,
	`tag` varchar(12) NOT NULL,
	`max_amps` double NOT NULL,
	`max_volts` double NOT NULL,
	`open_circuit_volts` double NOT NULL,
	`note` varchar(500) NOT NULL DEFAULT '',
	`revision` int NOT NULL DEFAULT 1,
	CONSTRAINT `supply_set_id` PRIMARY KEY(`id`),
	CONSTRAINT `supply_set_tag_uq` UNIQUE(`tag`)
);
--> statement-breakpoint
CREATE TABLE `valve` (
	`id` bigint unsigned AUTO_INCREMENT NOT NULL,
	`tag` varchar(12) NOT NULL,
	`kind` varchar(16) NOT NULL,
	`line_id` bigint unsigned NOT NULL,
	`chainage_m` double NOT NULL,
	`box` varchar(12) NOT NULL DEFAULT '',
	`segment_id` bigint unsigned,
	`east_segment_id` bigint unsigned,
	`seal` varchar(40) NOT NULL,
	`limit_c` double NOT NULL,
	`part_rise_share` double NOT NULL,
	`normal_position` varchar(40) NOT NULL,
	`note` varchar(500) NOT NULL DEFAULT '',
	`revision` int NOT NULL DEFAULT 1,
	CONSTRAINT `valve_id` PRIMARY KEY(`id`),
	CONSTRAINT `valve_tag_uq` UNIQUE(`tag`)
);
--> statement-breakpoint
CREATE TABLE `attachment` (
	`id` bigint unsigned AUTO_INCREMENT NOT NULL,
	`file_name` varchar(255) NOT NULL,
	`content_type` varchar(100) NOT NULL,
	`byte_size` bigint unsigned NOT NULL,
	`sha256` varchar(64) NOT NULL,
	`complete` boolean NOT NULL DEFAULT false,
	`subject_kind` varchar(40) NOT NULL,
	`subject_id` varchar(40) NOT NULL,
	`created_by` bigint unsigned,
	`created_at` datetime(3) NOT NULL,
	CONSTRAINT `attachment_id` PRIMARY KEY(`id`)
);
--> statement-breakpoint
CREATE TABLE `attachment_chunk` (
	`attachment_id` bigint unsigned NOT NULL,
	`chunk_no` int unsigned NOT NULL,
	`data` mediumblob NOT NULL,
	CONSTRAINT `attachment_chunk_pk` PRIMARY KEY(`attachment_id`,`chunk_no`)
);
--> statement-breakpoint
CREATE TABLE `derived_basis` (
	`derived_id` bigint unsigned NOT NULL,
	`channel_id` bigint unsigned NOT NULL,
	`from_at` datetime(3) NOT NULL,
	`to_at` datetime(3) NOT NULL,
	CONSTRAINT `derived_basis_pk` PRIMARY KEY(`derived_id`,`channel_id`,`from_at`)
);
--> statement-breakpoint
CREATE TABLE `derived_thing` (
	`id` bigint unsigned AUTO_INCREMENT NOT NULL,
	`kind` varchar(40) NOT NULL,
	`subject_id` varchar(80) NOT NULL,
	`made_at` datetime(3) NOT NULL,
	`stale_since` datetime(3),
	`stale_reason` varchar(500),
	CONSTRAINT `derived_thing_id` PRIMARY KEY(`id`),
	CONSTRAINT `derived_thing_uq` UNIQUE(`kind`,`subject_id`)
);
--> statement-breakpoint
CREATE TABLE `job` (
	`id` bigint unsigned AUTO_INCREMENT NOT NULL,
	`kind` varchar(40) NOT NULL,
	`payload` json NOT NULL,
	`dedupe_key` varchar(160),
	`state` varchar(12) NOT NULL,
	`run_at` datetime(3) NOT NULL,
	`attempts` int NOT NULL DEFAULT 0,
	`max_attempts` int NOT NULL DEFAULT 5,
	`lease_owner` varchar(64),
	`lease_until` datetime(3),
	`last_error` text,
	`created_at` datetime(3) NOT NULL,
	`finished_at` datetime(3),
	CONSTRAINT `job_id` PRIMARY KEY(`id`),
	CONSTRAINT `job_dedupe_uq` UNIQUE(`dedupe_key`)
);
--> statement-breakpoint
CREATE TABLE `product_clock` (
	`id` tinyint NOT NULL,
	`demo` boolean NOT NULL,
	`base_at` datetime(3) NOT NULL,
	`base_machine_at` datetime(3) NOT NULL,
	`seen_at` datetime(3) NOT NULL,
	CONSTRAINT `product_clock_id` PRIMARY KEY(`id`)
);
--> statement-breakpoint
CREATE TABLE `record` (
	`id` bigint unsigned AUTO_INCREMENT NOT NULL,
	`at` datetime(3) NOT NULL,
	`machine_at` datetime(3) NOT NULL,
	`person_id` bigint unsigned,
	`act` varchar(60) NOT NULL,
	`subject_kind` varchar(40) NOT NULL,
	`subject_id` varchar(40) NOT NULL,
	`effective_at` datetime(3),
	`before_value` json,
	`after_value` json,
	`reason` varchar(1000) NOT NULL DEFAULT '',
	`signed_act_id` bigint unsigned,
	CONSTRAINT `record_id` PRIMARY KEY(`id`)
);
--> statement-breakpoint
CREATE TABLE `schedule_owner` (
	`id` tinyint NOT NULL,
	`owner` varchar(64) NOT NULL,
	`lease_until` datetime(3) NOT NULL,
	CONSTRAINT `schedule_owner_id` PRIMARY KEY(`id`)
);
--> statement-breakpoint
CREATE TABLE `schedule_task` (
	`name` varchar(60) NOT NULL,
	`last_due_at` datetime(3) NOT NULL,
	CONSTRAINT `schedule_task_name` PRIMARY KEY(`name`)
);
--> statement-breakpoint
CREATE TABLE `signed_act` (
	`id` bigint unsigned AUTO_INCREMENT NOT NULL,
	`person_id` bigint unsigned NOT NULL,
	`meaning` varchar(120) NOT NULL,
	`subject_kind` varchar(40) NOT NULL,
	`subject_id` varchar(40) NOT NULL,
	`at` datetime(3) NOT NULL,
	`machine_at` datetime(3) NOT NULL,
	`used_at` datetime(3),
	CONSTRAINT `signed_act_id` PRIMARY KEY(`id`)
);
--> statement-breakpoint
ALTER TABLE `import_file` ADD CONSTRAINT `import_file_source_id_source_id_fk` FOREIGN KEY (`source_id`) REFERENCES `source`(`id`) ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `import_file` ADD CONSTRAINT `import_file_attachment_id_attachment_id_fk` FOREIGN KEY (`attachment_id`) REFERENCES `attachment`(`id`) ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `import_file` ADD CONSTRAINT `import_file_uploaded_by_person_id_fk` FOREIGN KEY (`uploaded_by`) REFERENCES `person`(`id`) ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `import_file` ADD CONSTRAINT `import_file_decided_by_person_id_fk` FOREIGN KEY (`decided_by`) REFERENCES `person`(`id`) ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `log_amendment` ADD CONSTRAINT `log_amendment_entry_id_log_entry_id_fk` FOREIGN KEY (`entry_id`) REFERENCES `log_entry`(`id`) ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `log_amendment` ADD CONSTRAINT `log_amendment_author_id_person_id_fk` FOREIGN KEY (`author_id`) REFERENCES `person`(`id`) ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `log_amendment` ADD CONSTRAINT `log_amendment_signed_act_id_signed_act_id_fk` FOREIGN KEY (`signed_act_id`) REFERENCES `signed_act`(`id`) ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `log_entry` ADD CONSTRAINT `log_entry_segment_id_segment_id_fk` FOREIGN KEY (`segment_id`) REFERENCES `segment`(`id`) ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `log_entry` ADD CONSTRAINT `log_entry_author_id_person_id_fk` FOREIGN KEY (`author_id`) REFERENCES `person`(`id`) ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `log_entry` ADD CONSTRAINT `log_entry_signed_act_id_signed_act_id_fk` FOREIGN KEY (`signed_act_id`) REFERENCES `signed_act`(`id`) ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `role_grant` ADD CONSTRAINT `role_grant_person_id_person_id_fk` FOREIGN KEY (`person_id`) REFERENCES `person`(`id`) ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `role_grant` ADD CONSTRAINT `role_grant_granted_by_person_id_fk` FOREIGN KEY (`granted_by`) REFERENCES `person`(`id`) ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `role_grant` ADD CONSTRAINT `role_grant_confirmed_by_person_id_fk` FOREIGN KEY (`confirmed_by`) REFERENCES `person`(`id`) ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `role_grant` ADD CONSTRAINT `role_grant_revoked_by_person_id_fk` FOREIGN KEY (`revoked_by`) REFERENCES `person`(`id`) ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `session` ADD CONSTRAINT `session_person_id_person_id_fk` FOREIGN KEY (`person_id`) REFERENCES `person`(`id`) ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `channel` ADD CONSTRAINT `channel_source_id_source_id_fk` FOREIGN KEY (`source_id`) REFERENCES `source`(`id`) ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `channel_map` ADD CONSTRAINT `channel_map_channel_id_channel_id_fk` FOREIGN KEY (`channel_id`) REFERENCES `channel`(`id`) ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `channel_map` ADD CONSTRAINT `channel_map_position_id_position_id_fk` FOREIGN KEY (`position_id`) REFERENCES `position`(`id`) ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `channel_map` ADD CONSTRAINT `channel_map_recorded_by_person_id_fk` FOREIGN KEY (`recorded_by`) REFERENCES `person`(`id`) ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `fitting` ADD CONSTRAINT `fitting_position_id_position_id_fk` FOREIGN KEY (`position_id`) REFERENCES `position`(`id`) ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `fitting` ADD CONSTRAINT `fitting_instrument_id_instrument_id_fk` FOREIGN KEY (`instrument_id`) REFERENCES `instrument`(`id`) ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `fitting` ADD CONSTRAINT `fitting_recorded_by_person_id_fk` FOREIGN KEY (`recorded_by`) REFERENCES `person`(`id`) ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `heater_circuit` ADD CONSTRAINT `heater_circuit_segment_id_segment_id_fk` FOREIGN KEY (`segment_id`) REFERENCES `segment`(`id`) ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `limit_value` ADD CONSTRAINT `limit_value_segment_id_segment_id_fk` FOREIGN KEY (`segment_id`) REFERENCES `segment`(`id`) ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `limit_value` ADD CONSTRAINT `limit_value_set_by_person_id_fk` FOREIGN KEY (`set_by`) REFERENCES `person`(`id`) ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `position` ADD CONSTRAINT `position_segment_id_segment_id_fk` FOREIGN KEY (`segment_id`) REFERENCES `segment`(`id`) ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `position` ADD CONSTRAINT `position_line_id_line_id_fk` FOREIGN KEY (`line_id`) REFERENCES `line`(`id`) ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `pump_placement` ADD CONSTRAINT `pump_placement_pump_id_pump_id_fk` FOREIGN KEY (`pump_id`) REFERENCES `pump`(`id`) ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `pump_placement` ADD CONSTRAINT `pump_placement_segment_id_segment_id_fk` FOREIGN KEY (`segment_id`) REFERENCES `segment`(`id`) ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `segment` ADD CONSTRAINT `segment_line_id_line_id_fk` FOREIGN KEY (`line_id`) REFERENCES `line`(`id`) ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `segment_state` ADD CONSTRAINT `segment_state_segment_id_segment_id_fk` FOREIGN KEY (`segment_id`) REFERENCES `segment`(`id`) ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `segment_state` ADD CONSTRAINT `segment_state_set_by_person_id_fk` FOREIGN KEY (`set_by`) REFERENCES `person`(`id`) ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `valve` ADD CONSTRAINT `valve_line_id_line_id_fk` FOREIGN KEY (`line_id`) REFERENCES `line`(`id`) ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `valve` ADD CONSTRAINT `valve_segment_id_segment_id_fk` FOREIGN KEY (`segment_id`) REFERENCES `segment`(`id`) ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `valve` ADD CONSTRAINT `valve_east_segment_id_segment_id_fk` FOREIGN KEY (`east_segment_id`) REFERENCES `segment`(`id`) ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `attachment` ADD CONSTRAINT `attachment_created_by_person_id_fk` FOREIGN KEY (`created_by`) REFERENCES `person`(`id`) ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `derived_basis` ADD CONSTRAINT `derived_basis_derived_id_derived_thing_id_fk` FOREIGN KEY (`derived_id`) REFERENCES `derived_thing`(`id`) ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `record` ADD CONSTRAINT `record_person_id_person_id_fk` FOREIGN KEY (`person_id`) REFERENCES `person`(`id`) ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `signed_act` ADD CONSTRAINT `signed_act_person_id_person_id_fk` FOREIGN KEY (`person_id`) REFERENCES `person`(`id`) ON DELETE no action ON UPDATE no action;--> statement-breakpoint
CREATE INDEX `import_file_sha_ix` ON `import_file` (`sha256`);--> statement-breakpoint
CREATE INDEX `import_file_state_ix` ON `import_file` (`state`,`uploaded_at`);--> statement-breakpoint
CREATE INDEX `import_file_source_ix` ON `import_file` (`source_id`,`last_at`);--> statement-breakpoint
CREATE INDEX `log_amendment_entry_ix` ON `log_amendment` (`entry_id`);--> statement-breakpoint
CREATE INDEX `log_entry_segment_ix` ON `log_entry` (`segment_id`,`event_at`);--> statement-breakpoint
CREATE INDEX `log_entry_event_ix` ON `log_entry` (`event_at`);--> statement-breakpoint
CREATE INDEX `role_grant_person_ix` ON `role_grant` (`person_id`);--> statement-breakpoint
CREATE INDEX `session_person_ix` ON `session` (`person_id`);--> statement-breakpoint
CREATE INDEX `session_expires_ix` ON `session` (`expires_at`);--> statement-breakpoint
CREATE INDEX `import_range_channel_ix` ON `import_range` (`channel_id`,`first_at`);--> statement-breakpoint
CREATE INDEX `channel_map_channel_ix` ON `channel_map` (`channel_id`,`starts_at`);--> statement-breakpoint
CREATE INDEX `channel_map_position_ix` ON `channel_map` (`position_id`,`starts_at`);--> statement-breakpoint
CREATE INDEX `fitting_position_ix` ON `fitting` (`position_id`,`starts_at`);--> statement-breakpoint
CREATE INDEX `limit_value_ix` ON `limit_value` (`kind`,`segment_id`,`starts_at`);--> statement-breakpoint
CREATE INDEX `position_segment_ix` ON `position` (`segment_id`);--> statement-breakpoint
CREATE INDEX `pump_placement_ix` ON `pump_placement` (`segment_id`,`starts_at`);--> statement-breakpoint
CREATE INDEX `segment_state_ix` ON `segment_state` (`segment_id`,`since`);--> statement-breakpoint
CREATE INDEX `attachment_subject_ix` ON `attachment` (`subject_kind`,`subject_id`);--> statement-breakpoint
CREATE INDEX `derived_basis_channel_ix` ON `derived_basis` (`channel_id`,`from_at`,`to_at`);--> statement-breakpoint
CREATE INDEX `job_due_ix` ON `job` (`state`,`run_at`,`id`);--> statement-breakpoint
CREATE INDEX `job_lease_ix` ON `job` (`state`,`lease_until`);--> statement-breakpoint
CREATE INDEX `record_subject_ix` ON `record` (`subject_kind`,`subject_id`,`id`);--> statement-breakpoint
CREATE INDEX `record_at_ix` ON `record` (`at`);--> statement-breakpoint
CREATE INDEX `signed_act_subject_ix` ON `signed_act` (`subject_kind`,`subject_id`);