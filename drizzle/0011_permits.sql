CREATE TABLE `adopted_threshold` (
	`id` bigint unsigned AUTO_INCREMENT NOT NULL,
	`threshold_key` varchar(40) NOT NULL,
	`value` double NOT NULL,
	`unit` varchar(16) NOT NULL,
	`source` varchar(200) NOT NULL,
	`edition` varchar(80) NOT NULL,
	`adopted_by` bigint unsigned NOT NULL,
	`adopted_at` datetime(3) NOT NULL,
	`review_at` datetime(3) NOT NULL,
	`ended_at` datetime(3),
	`ended_by` bigint unsigned,
	`reason` varchar(500) NOT NULL,
	`signed_act_id` bigint unsigned,
	CONSTRAINT `adopted_threshold_id` PRIMARY KEY(`id`)
);
--> statement-breakpoint
CREATE TABLE `bay_closure` (
	`id` bigint unsigned AUTO_INCREMENT NOT NULL,
	`line_id` bigint unsigned NOT NULL,
	`from_m` double NOT NULL,
	`to_m` double NOT NULL,
	`reason` varchar(1000) NOT NULL,
	`event_id` bigint unsigned,
	`closed_at` datetime(3) NOT NULL,
	`closed_by` bigint unsigned,
	`released_at` datetime(3),
	`released_by` bigint unsigned,
	`release_readings` json,
	`release_reason` varchar(1000) NOT NULL DEFAULT '',
	`signed_act_id` bigint unsigned,
	CONSTRAINT `bay_closure_id` PRIMARY KEY(`id`)
);
--> statement-breakpoint
CREATE TABLE `box_lock` (
	`id` bigint unsigned AUTO_INCREMENT NOT NULL,
	`permit_id` bigint unsigned NOT NULL,
	`box_code` varchar(20) NOT NULL,
	`lock_number` varchar(20) NOT NULL,
	`owner_id` bigint unsigned NOT NULL,
	`is_primary` boolean NOT NULL DEFAULT false,
	`on_at` datetime(3) NOT NULL,
	`on_witness` bigint unsigned,
	`on_signed_act_id` bigint unsigned,
	`off_at` datetime(3),
	`off_by` bigint unsigned,
	`off_witness` bigint unsigned,
	`off_how` varchar(12),
	`off_signed_act_id` bigint unsigned,
	`removal_detail` json,
	CONSTRAINT `box_lock_id` PRIMARY KEY(`id`)
);
--> statement-breakpoint
CREATE TABLE `competence` (
	`id` bigint unsigned AUTO_INCREMENT NOT NULL,
	`person_id` bigint unsigned NOT NULL,
	`kind` varchar(24) NOT NULL,
	`number` varchar(40) NOT NULL DEFAULT '',
	`starts_at` datetime(3) NOT NULL,
	`ends_at` datetime(3),
	`entered_by` bigint unsigned NOT NULL,
	`entered_at` datetime(3) NOT NULL,
	`replaced_at` datetime(3),
	`note` varchar(500) NOT NULL DEFAULT '',
	CONSTRAINT `competence_id` PRIMARY KEY(`id`)
);
--> statement-breakpoint
CREATE TABLE `heating_statement` (
	`id` bigint unsigned AUTO_INCREMENT NOT NULL,
	`segment_id` bigint unsigned NOT NULL,
	`is_on` boolean NOT NULL,
	`at` datetime(3) NOT NULL,
	`supply_set_id` bigint unsigned,
	`how` varchar(500) NOT NULL,
	`person_id` bigint unsigned NOT NULL,
	`recorded_at` datetime(3) NOT NULL,
	CONSTRAINT `heating_statement_id` PRIMARY KEY(`id`)
);
--> statement-breakpoint
CREATE TABLE `isolation_point` (
	`id` bigint unsigned AUTO_INCREMENT NOT NULL,
	`permit_id` bigint unsigned NOT NULL,
	`tag` varchar(20) NOT NULL,
	`isolates` varchar(200) NOT NULL,
	`required` varchar(200) NOT NULL,
	`purpose` varchar(8) NOT NULL,
	`lock_number` varchar(20) NOT NULL,
	`tag_number` varchar(20) NOT NULL DEFAULT '',
	`applied_by` bigint unsigned NOT NULL,
	`applied_at` datetime(3) NOT NULL,
	`applied_witness` bigint unsigned,
	`applied_signed_act_id` bigint unsigned,
	`verified_by` bigint unsigned,
	`verified_at` datetime(3),
	`verified_witness` bigint unsigned,
	`verified_signed_act_id` bigint unsigned,
	`released_how` varchar(500) NOT NULL DEFAULT '',
	`zero_energy` varchar(500) NOT NULL DEFAULT '',
	`removed_by` bigint unsigned,
	`removed_at` datetime(3),
	`removed_witness` bigint unsigned,
	`removed_how` varchar(12),
	`removed_signed_act_id` bigint unsigned,
	`removal_detail` json,
	`transferred_to_id` bigint unsigned,
	`note` varchar(500) NOT NULL DEFAULT '',
	`revision` int NOT NULL DEFAULT 1,
	CONSTRAINT `isolation_point_id` PRIMARY KEY(`id`)
);
--> statement-breakpoint
CREATE TABLE `lock_in_use` (
	`lock_number` varchar(20) NOT NULL,
	`permit_id` bigint unsigned NOT NULL,
	`point_id` bigint unsigned,
	`box_lock_id` bigint unsigned,
	`since` datetime(3) NOT NULL,
	CONSTRAINT `lock_in_use_lock_number` PRIMARY KEY(`lock_number`)
);
--> statement-breakpoint
CREATE TABLE `permit` (
	`id` bigint unsigned AUTO_INCREMENT NOT NULL,
	`number` varchar(20) NOT NULL,
	`short_code` varchar(8) NOT NULL,
	`state` varchar(12) NOT NULL,
	`revision` int NOT NULL DEFAULT 1,
	`version` int NOT NULL DEFAULT 1,
	`approved_version` int,
	`plan_id` bigint unsigned,
	`created_by` bigint unsigned NOT NULL,
	`created_at` datetime(3) NOT NULL,
	`requested_by` bigint unsigned,
	`requested_at` datetime(3),
	`approved_by` bigint unsigned,
	`approved_at` datetime(3),
	`holder_id` bigint unsigned,
	`window_from` datetime(3),
	`window_to` datetime(3),
	`current_until` datetime(3),
	`extensions` int NOT NULL DEFAULT 0,
	`extended_hours` double NOT NULL DEFAULT 0,
	`held` boolean NOT NULL DEFAULT false,
	`held_reason` varchar(500) NOT NULL DEFAULT '',
	`ended_at` datetime(3),
	CONSTRAINT `permit_id` PRIMARY KEY(`id`),
	CONSTRAINT `permit_number_uq` UNIQUE(`number`),
	CONSTRAINT `permit_short_code_uq` UNIQUE(`short_code`)
);
--> statement-breakpoint
CREATE TABLE `permit_act` (
	`id` bigint unsigned AUTO_INCREMENT NOT NULL,
	`permit_id` bigint unsigned NOT NULL,
	`act` varchar(20) NOT NULL,
	`from_state` varchar(12) NOT NULL,
	`to_state` varchar(12) NOT NULL,
	`revision` int NOT NULL,
	`version` int NOT NULL,
	`at` datetime(3) NOT NULL,
	`recorded_at` datetime(3) NOT NULL,
	`person_id` bigint unsigned,
	`reason` varchar(2000) NOT NULL DEFAULT '',
	`detail` json,
	`signed_act_id` bigint unsigned,
	CONSTRAINT `permit_act_id` PRIMARY KEY(`id`),
	CONSTRAINT `permit_act_uq` UNIQUE(`permit_id`,`revision`)
);
--> statement-breakpoint
CREATE TABLE `permit_round` (
	`id` bigint unsigned AUTO_INCREMENT NOT NULL,
	`permit_id` bigint unsigned NOT NULL,
	`at` datetime(3) NOT NULL,
	`recorded_at` datetime(3) NOT NULL,
	`person_id` bigint unsigned NOT NULL,
	`hottest_c` double,
	`hottest_at_m` double,
	`in_order` boolean NOT NULL,
	`text` varchar(2000) NOT NULL DEFAULT '',
	CONSTRAINT `permit_round_id` PRIMARY KEY(`id`)
);
--> statement-breakpoint
CREATE TABLE `permit_ruling` (
	`id` bigint unsigned AUTO_INCREMENT NOT NULL,
	`permit_id` bigint unsigned NOT NULL,
	`conflict_key` varchar(80) NOT NULL,
	`facts` varchar(1000) NOT NULL,
	`allowed` boolean NOT NULL,
	`text` varchar(2000) NOT NULL,
	`ruled_by` bigint unsigned NOT NULL,
	`ruled_at` datetime(3) NOT NULL,
	`signed_act_id` bigint unsigned,
	CONSTRAINT `permit_ruling_id` PRIMARY KEY(`id`)
);
--> statement-breakpoint
CREATE TABLE `permit_segment` (
	`permit_id` bigint unsigned NOT NULL,
	`segment_id` bigint unsigned NOT NULL,
	CONSTRAINT `permit_segment_pk` PRIMARY KEY(`permit_id`,`segment_id`)
);
--> statement-breakpoint
CREATE TABLE `permit_test` (
	`id` bigint unsigned AUTO_INCREMENT NOT NULL,
	`permit_id` bigint unsigned NOT NULL,
	`kind` varchar(24) NOT NULL,
	`place` varchar(200) NOT NULL DEFAULT '',
	`value` double,
	`unit` varchar(16) NOT NULL DEFAULT '',
	`passed` boolean NOT NULL,
	`instrument_serial` varchar(40) NOT NULL DEFAULT '',
	`calibration_due` datetime(3),
	`tester_id` bigint unsigned NOT NULL,
	`witness_id` bigint unsigned,
	`taken_at` datetime(3) NOT NULL,
	`recorded_by` bigint unsigned NOT NULL,
	`recorded_at` datetime(3) NOT NULL,
	`next_due_at` datetime(3),
	`note` varchar(500) NOT NULL DEFAULT '',
	CONSTRAINT `permit_test_id` PRIMARY KEY(`id`)
);
--> statement-breakpoint
CREATE TABLE `permit_version` (
	`id` bigint unsigned AUTO_INCREMENT NOT NULL,
	`permit_id` bigint unsigned NOT NULL,
	`version` int NOT NULL,
	`content` json NOT NULL,
	`reason` varchar(1000) NOT NULL DEFAULT '',
	`made_by` bigint unsigned NOT NULL,
	`made_at` datetime(3) NOT NULL,
	CONSTRAINT `permit_version_id` PRIMARY KEY(`id`),
	CONSTRAINT `permit_version_uq` UNIQUE(`permit_id`,`version`)
);
--> statement-breakpoint
CREATE TABLE `planned_work` (
	`id` bigint unsigned AUTO_INCREMENT NOT NULL,
	`kind` varchar(20) NOT NULL,
	`title` varchar(200) NOT NULL,
	`line_id` bigint unsigned,
	`segment_id` bigint unsigned,
	`from_m` double,
	`to_m` double,
	`starts_at` datetime(3) NOT NULL,
	`ends_at` datetime(3) NOT NULL,
	`people` varchar(500) NOT NULL DEFAULT '',
	`state` varchar(12) NOT NULL,
	`limited_from_m` double,
	`limited_to_m` double,
	`barrier` varchar(500) NOT NULL DEFAULT '',
	`ruling` varchar(2000) NOT NULL DEFAULT '',
	`ruled_by` bigint unsigned,
	`ruled_at` datetime(3),
	`signed_act_id` bigint unsigned,
	`note` varchar(1000) NOT NULL DEFAULT '',
	`created_by` bigint unsigned NOT NULL,
	`created_at` datetime(3) NOT NULL,
	`revision` int NOT NULL DEFAULT 1,
	CONSTRAINT `planned_work_id` PRIMARY KEY(`id`)
);
--> statement-breakpoint
CREATE TABLE `retention_run` (
	`id` bigint unsigned AUTO_INCREMENT NOT NULL,
	`asked_by` bigint unsigned NOT NULL,
	`asked_at` datetime(3) NOT NULL,
	`agreed_by` bigint unsigned,
	`agreed_at` datetime(3),
	`done_at` datetime(3),
	`called_off_at` datetime(3),
	`policy` json NOT NULL,
	`manifest` json NOT NULL,
	`ask_signed_act_id` bigint unsigned,
	`agree_signed_act_id` bigint unsigned,
	`revision` int NOT NULL DEFAULT 1,
	CONSTRAINT `retention_run_id` PRIMARY KEY(`id`)
);
--> statement-breakpoint
CREATE TABLE `safety_event` (
	`id` bigint unsigned AUTO_INCREMENT NOT NULL,
	`kind` varchar(30) NOT NULL,
	`permit_id` bigint unsigned,
	`segment_id` bigint unsigned,
	`occurrence_key` varchar(120) NOT NULL,
	`started_at` datetime(3) NOT NULL,
	`noticed_at` datetime(3) NOT NULL,
	`text` varchar(1000) NOT NULL,
	`ended_at` datetime(3),
	`ended_by` bigint unsigned,
	`end_reason` varchar(1000) NOT NULL DEFAULT '',
	`tolerated_reason` varchar(1000) NOT NULL DEFAULT '',
	`tolerated_by` bigint unsigned,
	`tolerated_at` datetime(3),
	CONSTRAINT `safety_event_id` PRIMARY KEY(`id`),
	CONSTRAINT `safety_event_occurrence_uq` UNIQUE(`occurrence_key`)
);
--> statement-breakpoint
CREATE TABLE `site_setting` (
	`id` bigint unsigned AUTO_INCREMENT NOT NULL,
	`setting_key` varchar(40) NOT NULL,
	`value` json NOT NULL,
	`set_by` bigint unsigned,
	`set_at` datetime(3) NOT NULL,
	`reason` varchar(500) NOT NULL DEFAULT '',
	CONSTRAINT `site_setting_id` PRIMARY KEY(`id`)
);
--> statement-breakpoint
ALTER TABLE `adopted_threshold` ADD CONSTRAINT `adopted_threshold_adopted_by_person_id_fk` FOREIGN KEY (`adopted_by`) REFERENCES `person`(`id`) ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `adopted_threshold` ADD CONSTRAINT `adopted_threshold_ended_by_person_id_fk` FOREIGN KEY (`ended_by`) REFERENCES `person`(`id`) ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `adopted_threshold` ADD CONSTRAINT `adopted_threshold_signed_act_id_signed_act_id_fk` FOREIGN KEY (`signed_act_id`) REFERENCES `signed_act`(`id`) ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `bay_closure` ADD CONSTRAINT `bay_closure_line_id_line_id_fk` FOREIGN KEY (`line_id`) REFERENCES `line`(`id`) ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `bay_closure` ADD CONSTRAINT `bay_closure_event_id_safety_event_id_fk` FOREIGN KEY (`event_id`) REFERENCES `safety_event`(`id`) ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `bay_closure` ADD CONSTRAINT `bay_closure_closed_by_person_id_fk` FOREIGN KEY (`closed_by`) REFERENCES `person`(`id`) ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `bay_closure` ADD CONSTRAINT `bay_closure_released_by_person_id_fk` FOREIGN KEY (`released_by`) REFERENCES `person`(`id`) ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `bay_closure` ADD CONSTRAINT `bay_closure_signed_act_id_signed_act_id_fk` FOREIGN KEY (`signed_act_id`) REFERENCES `signed_act`(`id`) ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `box_lock` ADD CONSTRAINT `box_lock_permit_id_permit_id_fk` FOREIGN KEY (`permit_id`) REFERENCES `permit`(`id`) ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `box_lock` ADD CONSTRAINT `box_lock_owner_id_person_id_fk` FOREIGN KEY (`owner_id`) REFERENCES `person`(`id`) ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `box_lock` ADD CONSTRAINT `box_lock_on_witness_person_id_fk` FOREIGN KEY (`on_witness`) REFERENCES `person`(`id`) ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `box_lock` ADD CONSTRAINT `box_lock_on_signed_act_id_signed_act_id_fk` FOREIGN KEY (`on_signed_act_id`) REFERENCES `signed_act`(`id`) ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `box_lock` ADD CONSTRAINT `box_lock_off_by_person_id_fk` FOREIGN KEY (`off_by`) REFERENCES `person`(`id`) ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `box_lock` ADD CONSTRAINT `box_lock_off_witness_person_id_fk` FOREIGN KEY (`off_witness`) REFERENCES `person`(`id`) ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `box_lock` ADD CONSTRAINT `box_lock_off_signed_act_id_signed_act_id_fk` FOREIGN KEY (`off_signed_act_id`) REFERENCES `signed_act`(`id`) ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `competence` ADD CONSTRAINT `competence_person_id_person_id_fk` FOREIGN KEY (`person_id`) REFERENCES `person`(`id`) ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `competence` ADD CONSTRAINT `competence_entered_by_person_id_fk` FOREIGN KEY (`entered_by`) REFERENCES `person`(`id`) ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `heating_statement` ADD CONSTRAINT `heating_statement_segment_id_segment_id_fk` FOREIGN KEY (`segment_id`) REFERENCES `segment`(`id`) ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `heating_statement` ADD CONSTRAINT `heating_statement_supply_set_id_supply_set_id_fk` FOREIGN KEY (`supply_set_id`) REFERENCES `supply_set`(`id`) ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `heating_statement` ADD CONSTRAINT `heating_statement_person_id_person_id_fk` FOREIGN KEY (`person_id`) REFERENCES `person`(`id`) ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `isolation_point` ADD CONSTRAINT `isolation_point_permit_id_permit_id_fk` FOREIGN KEY (`permit_id`) REFERENCES `permit`(`id`) ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `isolation_point` ADD CONSTRAINT `isolation_point_applied_by_person_id_fk` FOREIGN KEY (`applied_by`) REFERENCES `person`(`id`) ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `isolation_point` ADD CONSTRAINT `isolation_point_applied_witness_person_id_fk` FOREIGN KEY (`applied_witness`) REFERENCES `person`(`id`) ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `isolation_point` ADD CONSTRAINT `isolation_point_applied_signed_act_id_signed_act_id_fk` FOREIGN KEY (`applied_signed_act_id`) REFERENCES `signed_act`(`id`) ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `isolation_point` ADD CONSTRAINT `isolation_point_verified_by_person_id_fk` FOREIGN KEY (`verified_by`) REFERENCES `person`(`id`) ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `isolation_point` ADD CONSTRAINT `isolation_point_verified_witness_person_id_fk` FOREIGN KEY (`verified_witness`) REFERENCES `person`(`id`) ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `isolation_point` ADD CONSTRAINT `isolation_point_verified_signed_act_id_signed_act_id_fk` FOREIGN KEY (`verified_signed_act_id`) REFERENCES `signed_act`(`id`) ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `isolation_point` ADD CONSTRAINT `isolation_point_removed_by_person_id_fk` FOREIGN KEY (`removed_by`) REFERENCES `person`(`id`) ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `isolation_point` ADD CONSTRAINT `isolation_point_removed_witness_person_id_fk` FOREIGN KEY (`removed_witness`) REFERENCES `person`(`id`) ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `isolation_point` ADD CONSTRAINT `isolation_point_removed_signed_act_id_signed_act_id_fk` FOREIGN KEY (`removed_signed_act_id`) REFERENCES `signed_act`(`id`) ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `lock_in_use` ADD CONSTRAINT `lock_in_use_permit_id_permit_id_fk` FOREIGN KEY (`permit_id`) REFERENCES `permit`(`id`) ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `lock_in_use` ADD CONSTRAINT `lock_in_use_point_id_isolation_point_id_fk` FOREIGN KEY (`point_id`) REFERENCES `isolation_point`(`id`) ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `lock_in_use` ADD CONSTRAINT `lock_in_use_box_lock_id_box_lock_id_fk` FOREIGN KEY (`box_lock_id`) REFERENCES `box_lock`(`id`) ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `permit` ADD CONSTRAINT `permit_plan_id_bake_plan_id_fk` FOREIGN KEY (`plan_id`) REFERENCES `bake_plan`(`id`) ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `permit` ADD CONSTRAINT `permit_created_by_person_id_fk` FOREIGN KEY (`created_by`) REFERENCES `person`(`id`) ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `permit` ADD CONSTRAINT `permit_requested_by_person_id_fk` FOREIGN KEY (`requested_by`) REFERENCES `person`(`id`) ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `permit` ADD CONSTRAINT `permit_approved_by_person_id_fk` FOREIGN KEY (`approved_by`) REFERENCES `person`(`id`) ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `permit` ADD CONSTRAINT `permit_holder_id_person_id_fk` FOREIGN KEY (`holder_id`) REFERENCES `person`(`id`) ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `permit_act` ADD CONSTRAINT `permit_act_permit_id_permit_id_fk` FOREIGN KEY (`permit_id`) REFERENCES `permit`(`id`) ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `permit_act` ADD CONSTRAINT `permit_act_person_id_person_id_fk` FOREIGN KEY (`person_id`) REFERENCES `person`(`id`) ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `permit_act` ADD CONSTRAINT `permit_act_signed_act_id_signed_act_id_fk` FOREIGN KEY (`signed_act_id`) REFERENCES `signed_act`(`id`) ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `permit_round` ADD CONSTRAINT `permit_round_permit_id_permit_id_fk` FOREIGN KEY (`permit_id`) REFERENCES `permit`(`id`) ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `permit_round` ADD CONSTRAINT `permit_round_person_id_person_id_fk` FOREIGN KEY (`person_id`) REFERENCES `person`(`id`) ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `permit_ruling` ADD CONSTRAINT `permit_ruling_permit_id_permit_id_fk` FOREIGN KEY (`permit_id`) REFERENCES `permit`(`id`) ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `permit_ruling` ADD CONSTRAINT `permit_ruling_ruled_by_person_id_fk` FOREIGN KEY (`ruled_by`) REFERENCES `person`(`id`) ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `permit_ruling` ADD CONSTRAINT `permit_ruling_signed_act_id_signed_act_id_fk` FOREIGN KEY (`signed_act_id`) REFERENCES `signed_act`(`id`) ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `permit_segment` ADD CONSTRAINT `permit_segment_permit_id_permit_id_fk` FOREIGN KEY (`permit_id`) REFERENCES `permit`(`id`) ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `permit_segment` ADD CONSTRAINT `permit_segment_segment_id_segment_id_fk` FOREIGN KEY (`segment_id`) REFERENCES `segment`(`id`) ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `permit_test` ADD CONSTRAINT `permit_test_permit_id_permit_id_fk` FOREIGN KEY (`permit_id`) REFERENCES `permit`(`id`) ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `permit_test` ADD CONSTRAINT `permit_test_tester_id_person_id_fk` FOREIGN KEY (`tester_id`) REFERENCES `person`(`id`) ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `permit_test` ADD CONSTRAINT `permit_test_witness_id_person_id_fk` FOREIGN KEY (`witness_id`) REFERENCES `person`(`id`) ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `permit_test` ADD CONSTRAINT `permit_test_recorded_by_person_id_fk` FOREIGN KEY (`recorded_by`) REFERENCES `person`(`id`) ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `permit_version` ADD CONSTRAINT `permit_version_permit_id_permit_id_fk` FOREIGN KEY (`permit_id`) REFERENCES `permit`(`id`) ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `permit_version` ADD CONSTRAINT `permit_version_made_by_person_id_fk` FOREIGN KEY (`made_by`) REFERENCES `person`(`id`) ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `planned_work` ADD CONSTRAINT `planned_work_line_id_line_id_fk` FOREIGN KEY (`line_id`) REFERENCES `line`(`id`) ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `planned_work` ADD CONSTRAINT `planned_work_segment_id_segment_id_fk` FOREIGN KEY (`segment_id`) REFERENCES `segment`(`id`) ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `planned_work` ADD CONSTRAINT `planned_work_ruled_by_person_id_fk` FOREIGN KEY (`ruled_by`) REFERENCES `person`(`id`) ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `planned_work` ADD CONSTRAINT `planned_work_signed_act_id_signed_act_id_fk` FOREIGN KEY (`signed_act_id`) REFERENCES `signed_act`(`id`) ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `planned_work` ADD CONSTRAINT `planned_work_created_by_person_id_fk` FOREIGN KEY (`created_by`) REFERENCES `person`(`id`) ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `retention_run` ADD CONSTRAINT `retention_run_asked_by_person_id_fk` FOREIGN KEY (`asked_by`) REFERENCES `person`(`id`) ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `retention_run` ADD CONSTRAINT `retention_run_agreed_by_person_id_fk` FOREIGN KEY (`agreed_by`) REFERENCES `person`(`id`) ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `retention_run` ADD CONSTRAINT `retention_run_ask_signed_act_id_signed_act_id_fk` FOREIGN KEY (`ask_signed_act_id`) REFERENCES `signed_act`(`id`) ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `retention_run` ADD CONSTRAINT `retention_run_agree_signed_act_id_signed_act_id_fk` FOREIGN KEY (`agree_signed_act_id`) REFERENCES `signed_act`(`id`) ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `safety_event` ADD CONSTRAINT `safety_event_permit_id_permit_id_fk` FOREIGN KEY (`permit_id`) REFERENCES `permit`(`id`) ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `safety_event` ADD CONSTRAINT `safety_event_segment_id_segment_id_fk` FOREIGN KEY (`segment_id`) REFERENCES `segment`(`id`) ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `safety_event` ADD CONSTRAINT `safety_event_ended_by_person_id_fk` FOREIGN KEY (`ended_by`) REFERENCES `person`(`id`) ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `safety_event` ADD CONSTRAINT `safety_event_tolerated_by_person_id_fk` FOREIGN KEY (`tolerated_by`) REFERENCES `person`(`id`) ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `site_setting` ADD CONSTRAINT `site_setting_set_by_person_id_fk` FOREIGN KEY (`set_by`) REFERENCES `person`(`id`) ON DELETE no action ON UPDATE no action;--> statement-breakpoint
CREATE INDEX `adopted_threshold_ix` ON `adopted_threshold` (`threshold_key`,`adopted_at`);--> statement-breakpoint
CREATE INDEX `bay_closure_open_ix` ON `bay_closure` (`released_at`);--> statement-breakpoint
CREATE INDEX `box_lock_permit_ix` ON `box_lock` (`permit_id`);--> statement-breakpoint
CREATE INDEX `competence_ix` ON `competence` (`person_id`,`kind`);--> statement-breakpoint
CREATE INDEX `heating_statement_ix` ON `heating_statement` (`segment_id`,`at`);--> statement-breakpoint
CREATE INDEX `isolation_point_permit_ix` ON `isolation_point` (`permit_id`,`tag`);--> statement-breakpoint
CREATE INDEX `permit_state_ix` ON `permit` (`state`,`window_to`);--> statement-breakpoint
CREATE INDEX `permit_act_at_ix` ON `permit_act` (`at`);--> statement-breakpoint
CREATE INDEX `permit_round_ix` ON `permit_round` (`permit_id`,`at`);--> statement-breakpoint
CREATE INDEX `permit_ruling_ix` ON `permit_ruling` (`permit_id`,`conflict_key`,`id`);--> statement-breakpoint
CREATE INDEX `permit_segment_ix` ON `permit_segment` (`segment_id`);--> statement-breakpoint
CREATE INDEX `permit_test_ix` ON `permit_test` (`permit_id`,`kind`,`taken_at`);--> statement-breakpoint
CREATE INDEX `planned_work_time_ix` ON `planned_work` (`starts_at`,`ends_at`);--> statement-breakpoint
CREATE INDEX `safety_event_open_ix` ON `safety_event` (`ended_at`,`started_at`);--> statement-breakpoint
CREATE INDEX `site_setting_ix` ON `site_setting` (`setting_key`,`id`);