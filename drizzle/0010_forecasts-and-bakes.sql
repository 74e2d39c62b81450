CREATE TABLE `bake_deviation` (
	`id` bigint unsigned AUTO_INCREMENT NOT NULL,
	`segment_id` bigint unsigned NOT NULL,
	`plan_id` bigint unsigned,
	`kind` varchar(16) NOT NULL,
	`starts_at` datetime(3) NOT NULL,
	`ends_at` datetime(3),
	`detail` varchar(1000) NOT NULL,
	`noted_by` bigint unsigned,
	`noted_at` datetime(3) NOT NULL,
	CONSTRAINT `bake_deviation_id` PRIMARY KEY(`id`)
);
--> statement-breakpoint
CREATE TABLE `bake_placement` (
	`schedule_id` bigint unsigned NOT NULL,
	`plan_id` bigint unsigned NOT NULL,
	`starts_at` datetime(3),
	`supply_set_id` bigint unsigned,
	`cart_id` bigint unsigned,
	`pinned` boolean NOT NULL DEFAULT false,
	`trouble` json,
	CONSTRAINT `bake_placement_pk` PRIMARY KEY(`schedule_id`,`plan_id`)
);
--> statement-breakpoint
CREATE TABLE `bake_plan` (
	`id` bigint unsigned AUTO_INCREMENT NOT NULL,
	`title` varchar(120) NOT NULL,
	`state` varchar(12) NOT NULL,
	`priority` varchar(12) NOT NULL DEFAULT 'normal',
	`version` int NOT NULL DEFAULT 1,
	`baseline_version` int,
	`created_by` bigint unsigned NOT NULL,
	`created_at` datetime(3) NOT NULL,
	`ready_by` bigint unsigned,
	`ready_at` datetime(3),
	`ready_signed_act_id` bigint unsigned,
	`closed_by` bigint unsigned,
	`closed_at` datetime(3),
	`close_reason` varchar(1000) NOT NULL DEFAULT '',
	`revision` int NOT NULL DEFAULT 1,
	CONSTRAINT `bake_plan_id` PRIMARY KEY(`id`)
);
--> statement-breakpoint
CREATE TABLE `bake_plan_check` (
	`id` bigint unsigned AUTO_INCREMENT NOT NULL,
	`plan_id` bigint unsigned NOT NULL,
	`item` varchar(60) NOT NULL,
	`done` boolean NOT NULL,
	`note` varchar(500) NOT NULL DEFAULT '',
	`set_by` bigint unsigned NOT NULL,
	`set_at` datetime(3) NOT NULL,
	CONSTRAINT `bake_plan_check_id` PRIMARY KEY(`id`)
);
--> statement-breakpoint
CREATE TABLE `bake_plan_segment` (
	`plan_id` bigint unsigned NOT NULL,
	`segment_id` bigint unsigned NOT NULL,
	`sort_order` smallint NOT NULL,
	CONSTRAINT `bake_plan_segment_pk` PRIMARY KEY(`plan_id`,`segment_id`)
);
--> statement-breakpoint
CREATE TABLE `bake_plan_version` (
	`id` bigint unsigned AUTO_INCREMENT NOT NULL,
	`plan_id` bigint unsigned NOT NULL,
	`version` int NOT NULL,
	`content` json NOT NULL,
	`predicted` json,
	`reason` varchar(1000) NOT NULL DEFAULT '',
	`made_by` bigint unsigned NOT NULL,
	`made_at` datetime(3) NOT NULL,
	CONSTRAINT `bake_plan_version_id` PRIMARY KEY(`id`),
	CONSTRAINT `bake_plan_version_uq` UNIQUE(`plan_id`,`version`)
);
--> statement-breakpoint
CREATE TABLE `bake_schedule` (
	`id` bigint unsigned AUTO_INCREMENT NOT NULL,
	`title` varchar(120) NOT NULL,
	`state` varchar(12) NOT NULL,
	`objective` varchar(20) NOT NULL,
	`from_at` datetime(3) NOT NULL,
	`until_at` datetime(3) NOT NULL,
	`progress` double NOT NULL DEFAULT 0,
	`outcome` json,
	`fault` text,
	`made_by` bigint unsigned NOT NULL,
	`made_at` datetime(3) NOT NULL,
	`revision` int NOT NULL DEFAULT 1,
	CONSTRAINT `bake_schedule_id` PRIMARY KEY(`id`)
);
--> statement-breakpoint
CREATE TABLE `crew` (
	`id` bigint unsigned AUTO_INCREMENT NOT NULL,
	`code` varchar(12) NOT NULL,
	`name` varchar(80) NOT NULL,
	`size` smallint NOT NULL,
	`roster` json NOT NULL,
	`ends_at` datetime(3),
	`revision` int NOT NULL DEFAULT 1,
	CONSTRAINT `crew_id` PRIMARY KEY(`id`),
	CONSTRAINT `crew_code_uq` UNIQUE(`code`)
);
--> statement-breakpoint
CREATE TABLE `forecast_record` (
	`id` bigint unsigned AUTO_INCREMENT NOT NULL,
	`segment_id` bigint unsigned NOT NULL,
	`position_id` bigint unsigned NOT NULL,
	`made_by` bigint unsigned NOT NULL,
	`made_at` datetime(3) NOT NULL,
	`started_at` datetime(3) NOT NULL,
	`window_from` datetime(3) NOT NULL,
	`window_to` datetime(3) NOT NULL,
	`target_pa` double NOT NULL,
	`median_at` datetime(3) NOT NULL,
	`low_at` datetime(3) NOT NULL,
	`high_at` datetime(3),
	`model` json NOT NULL,
	`note` varchar(1000) NOT NULL DEFAULT '',
	`outcome` varchar(12) NOT NULL DEFAULT 'open',
	`reached_at` datetime(3),
	`judged_at` datetime(3),
	`outcome_reason` varchar(500) NOT NULL DEFAULT '',
	CONSTRAINT `forecast_record_id` PRIMARY KEY(`id`)
);
--> statement-breakpoint
CREATE TABLE `holiday` (
	`day` varchar(10) NOT NULL,
	`name` varchar(80) NOT NULL,
	CONSTRAINT `holiday_day` PRIMARY KEY(`day`)
);
--> statement-breakpoint
CREATE TABLE `isolation_test` (
	`id` bigint unsigned AUTO_INCREMENT NOT NULL,
	`segment_id` bigint unsigned NOT NULL,
	`position_id` bigint unsigned NOT NULL,
	`state` varchar(12) NOT NULL,
	`closed_at` datetime(3) NOT NULL,
	`fit_from` datetime(3) NOT NULL,
	`fit_to` datetime(3) NOT NULL,
	`limit_pa_per_hour` double NOT NULL,
	`result` json NOT NULL,
	`note` varchar(1000) NOT NULL DEFAULT '',
	`recorded_by` bigint unsigned NOT NULL,
	`recorded_at` datetime(3) NOT NULL,
	`accepted_by` bigint unsigned,
	`accepted_at` datetime(3),
	`accept_remark` varchar(1000) NOT NULL DEFAULT '',
	`accept_signed_act_id` bigint unsigned,
	`voided_by` bigint unsigned,
	`voided_at` datetime(3),
	`void_remark` varchar(1000) NOT NULL DEFAULT '',
	`void_signed_act_id` bigint unsigned,
	`revision` int NOT NULL DEFAULT 1,
	CONSTRAINT `isolation_test_id` PRIMARY KEY(`id`)
);
--> statement-breakpoint
ALTER TABLE `segment` ADD `feeder` varchar(12);--> statement-breakpoint
ALTER TABLE `bake_deviation` ADD CONSTRAINT `bake_deviation_segment_id_segment_id_fk` FOREIGN KEY (`segment_id`) REFERENCES `segment`(`id`) ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `bake_deviation` ADD CONSTRAINT `bake_deviation_plan_id_bake_plan_id_fk` FOREIGN KEY (`plan_id`) REFERENCES `bake_plan`(`id`) ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `bake_deviation` ADD CONSTRAINT `bake_deviation_noted_by_person_id_fk` FOREIGN KEY (`noted_by`) REFERENCES `person`(`id`) ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `bake_placement` ADD CONSTRAINT `bake_placement_schedule_id_bake_schedule_id_fk` FOREIGN KEY (`schedule_id`) REFERENCES `bake_schedule`(`id`) ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `bake_placement` ADD CONSTRAINT `bake_placement_plan_id_bake_plan_id_fk` FOREIGN KEY (`plan_id`) REFERENCES `bake_plan`(`id`) ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `bake_placement` ADD CONSTRAINT `bake_placement_supply_set_id_supply_set_id_fk` FOREIGN KEY (`supply_set_id`) REFERENCES `supply_set`(`id`) ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `bake_placement` ADD CONSTRAINT `bake_placement_cart_id_pump_id_fk` FOREIGN KEY (`cart_id`) REFERENCES `pump`(`id`) ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `bake_plan` ADD CONSTRAINT `bake_plan_created_by_person_id_fk` FOREIGN KEY (`created_by`) REFERENCES `person`(`id`) ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `bake_plan` ADD CONSTRAINT `bake_plan_ready_by_person_id_fk` FOREIGN KEY (`ready_by`) REFERENCES `person`(`id`) ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `bake_plan` ADD CONSTRAINT `bake_plan_ready_signed_act_id_signed_act_id_fk` FOREIGN KEY (`ready_signed_act_id`) REFERENCES `signed_act`(`id`) ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `bake_plan` ADD CONSTRAINT `bake_plan_closed_by_person_id_fk` FOREIGN KEY (`closed_by`) REFERENCES `person`(`id`) ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `bake_plan_check` ADD CONSTRAINT `bake_plan_check_plan_id_bake_plan_id_fk` FOREIGN KEY (`plan_id`) REFERENCES `bake_plan`(`id`) ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `bake_plan_check` ADD CONSTRAINT `bake_plan_check_set_by_person_id_fk` FOREIGN KEY (`set_by`) REFERENCES `person`(`id`) ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `bake_plan_segment` ADD CONSTRAINT `bake_plan_segment_plan_id_bake_plan_id_fk` FOREIGN KEY (`plan_id`) REFERENCES `bake_plan`(`id`) ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `bake_plan_segment` ADD CONSTRAINT `bake_plan_segment_segment_id_segment_id_fk` FOREIGN KEY (`segment_id`) REFERENCES `segment`(`id`) ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `bake_plan_version` ADD CONSTRAINT `bake_plan_version_plan_id_bake_plan_id_fk` FOREIGN KEY (`plan_id`) REFERENCES `bake_plan`(`id`) ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `bake_plan_version` ADD CONSTRAINT `bake_plan_version_made_by_person_id_fk` FOREIGN KEY (`made_by`) REFERENCES `person`(`id`) ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `bake_schedule` ADD CONSTRAINT `bake_schedule_made_by_person_id_fk` FOREIGN KEY (`made_by`) REFERENCES `person`(`id`) ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `forecast_record` ADD CONSTRAINT `forecast_record_segment_id_segment_id_fk` FOREIGN KEY (`segment_id`) REFERENCES `segment`(`id`) ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `forecast_record` ADD CONSTRAINT `forecast_record_position_id_position_id_fk` FOREIGN KEY (`position_id`) REFERENCES `position`(`id`) ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `forecast_record` ADD CONSTRAINT `forecast_record_made_by_person_id_fk` FOREIGN KEY (`made_by`) REFERENCES `person`(`id`) ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `isolation_test` ADD CONSTRAINT `isolation_test_segment_id_segment_id_fk` FOREIGN KEY (`segment_id`) REFERENCES `segment`(`id`) ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `isolation_test` ADD CONSTRAINT `isolation_test_position_id_position_id_fk` FOREIGN KEY (`position_id`) REFERENCES `position`(`id`) ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `isolation_test` ADD CONSTRAINT `isolation_test_recorded_by_person_id_fk` FOREIGN KEY (`recorded_by`) REFERENCES `person`(`id`) ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `isolation_test` ADD CONSTRAINT `isolation_test_accepted_by_person_id_fk` FOREIGN KEY (`accepted_by`) REFERENCES `person`(`id`) ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `isolation_test` ADD CONSTRAINT `isolation_test_accept_signed_act_id_signed_act_id_fk` FOREIGN KEY (`accept_signed_act_id`) REFERENCES `signed_act`(`id`) ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `isolation_test` ADD CONSTRAINT `isolation_test_voided_by_person_id_fk` FOREIGN KEY (`voided_by`) REFERENCES `person`(`id`) ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `isolation_test` ADD CONSTRAINT `isolation_test_void_signed_act_id_signed_act_id_fk` FOREIGN KEY (`void_signed_act_id`) REFERENCES `signed_act`(`id`) ON DELETE no action ON UPDATE no action;--> statement-breakpoint
CREATE INDEX `bake_deviation_segment_ix` ON `bake_deviation` (`segment_id`,`starts_at`);--> statement-breakpoint
CREATE INDEX `bake_plan_state_ix` ON `bake_plan` (`state`,`id`);--> statement-breakpoint
CREATE INDEX `bake_plan_check_ix` ON `bake_plan_check` (`plan_id`,`item`,`id`);--> statement-breakpoint
CREATE INDEX `bake_plan_segment_ix` ON `bake_plan_segment` (`segment_id`);--> statement-breakpoint
CREATE INDEX `bake_schedule_state_ix` ON `bake_schedule` (`state`,`id`);--> statement-breakpoint
CREATE INDEX `forecast_record_segment_ix` ON `forecast_record` (`segment_id`,`made_at`);--> statement-breakpoint
CREATE INDEX `forecast_record_outcome_ix` ON `forecast_record` (`outcome`,`judged_at`);--> statement-breakpoint
CREATE INDEX `isolation_test_segment_ix` ON `isolation_test` (`segment_id`,`closed_at`);