CREATE TABLE `alert` (
	`id` bigint unsigned AUTO_INCREMENT NOT NULL,
	`rule_id` bigint unsigned,
	`rule_version` int,
	`alert_condition` varchar(24) NOT NULL,
	`priority` varchar(8) NOT NULL,
	`state` varchar(16) NOT NULL,
	`occurrence_key` varchar(160) NOT NULL,
	`segment_id` bigint unsigned,
	`position_id` bigint unsigned,
	`source_id` bigint unsigned,
	`permit_id` bigint unsigned,
	`safety_event_id` bigint unsigned,
	`title` varchar(200) NOT NULL,
	`detail` json,
	`value` double,
	`limit_value` double,
	`unit` varchar(16) NOT NULL DEFAULT '',
	`started_at` datetime(3) NOT NULL,
	`noticed_at` datetime(3) NOT NULL,
	`cleared_at` datetime(3),
	`clear_noticed_at` datetime(3),
	`latching` boolean NOT NULL DEFAULT false,
	`owner_id` bigint unsigned,
	`owned_at` datetime(3),
	`offered_to` bigint unsigned,
	`escalated_step` int NOT NULL DEFAULT 0,
	`next_escalation_at` datetime(3),
	`ended_at` datetime(3),
	`revision` int NOT NULL DEFAULT 1,
	CONSTRAINT `alert_id` PRIMARY KEY(`id`),
	CONSTRAINT `alert_occurrence_uq` UNIQUE(`occurrence_key`)
);
--> statement-breakpoint
CREATE TABLE `alert_act` (
	`id` bigint unsigned AUTO_INCREMENT NOT NULL,
	`alert_id` bigint unsigned NOT NULL,
	`act` varchar(12) NOT NULL,
	`at` datetime(3) NOT NULL,
	`recorded_at` datetime(3) NOT NULL,
	`person_id` bigint unsigned,
	`text` varchar(1000) NOT NULL DEFAULT '',
	`detail` json,
	`signed_act_id` bigint unsigned,
	CONSTRAINT `alert_act_id` PRIMARY KEY(`id`)
);
--> statement-breakpoint
CREATE TABLE `alert_out_of_service` (
	`id` bigint unsigned AUTO_INCREMENT NOT NULL,
	`rule_id` bigint unsigned NOT NULL,
	`subject` varchar(40) NOT NULL DEFAULT '',
	`work_reference` varchar(120) NOT NULL,
	`reason` varchar(500) NOT NULL,
	`set_by` bigint unsigned NOT NULL,
	`set_at` datetime(3) NOT NULL,
	`review_at` datetime(3) NOT NULL,
	`ended_at` datetime(3),
	`ended_by` bigint unsigned,
	CONSTRAINT `alert_out_of_service_id` PRIMARY KEY(`id`)
);
--> statement-breakpoint
CREATE TABLE `alert_rule` (
	`id` bigint unsigned AUTO_INCREMENT NOT NULL,
	`code` varchar(40) NOT NULL,
	`alert_condition` varchar(24) NOT NULL,
	`enabled` boolean NOT NULL DEFAULT false,
	`version` int NOT NULL DEFAULT 1,
	`created_by` bigint unsigned,
	`created_at` datetime(3) NOT NULL,
	`revision` int NOT NULL DEFAULT 1,
	CONSTRAINT `alert_rule_id` PRIMARY KEY(`id`),
	CONSTRAINT `alert_rule_code_uq` UNIQUE(`code`)
);
--> statement-breakpoint
CREATE TABLE `alert_rule_version` (
	`id` bigint unsigned AUTO_INCREMENT NOT NULL,
	`rule_id` bigint unsigned NOT NULL,
	`version` int NOT NULL,
	`content` json NOT NULL,
	`starts_at` datetime(3) NOT NULL,
	`reason` varchar(1000) NOT NULL,
	`made_by` bigint unsigned,
	`made_at` datetime(3) NOT NULL,
	CONSTRAINT `alert_rule_version_id` PRIMARY KEY(`id`),
	CONSTRAINT `alert_rule_version_uq` UNIQUE(`rule_id`,`version`)
);
--> statement-breakpoint
CREATE TABLE `alert_shelf` (
	`id` bigint unsigned AUTO_INCREMENT NOT NULL,
	`alert_id` bigint unsigned NOT NULL,
	`reason` varchar(20) NOT NULL,
	`text` varchar(500) NOT NULL,
	`shelved_by` bigint unsigned NOT NULL,
	`from_at` datetime(3) NOT NULL,
	`until_at` datetime(3) NOT NULL,
	`ended_at` datetime(3),
	`ended_by` bigint unsigned,
	CONSTRAINT `alert_shelf_id` PRIMARY KEY(`id`)
);
--> statement-breakpoint
CREATE TABLE `alert_watch` (
	`rule_id` bigint unsigned NOT NULL,
	`subject` varchar(40) NOT NULL,
	`looked_until` datetime(3) NOT NULL,
	`memory` json NOT NULL,
	`evaluable` boolean NOT NULL,
	`why` varchar(300) NOT NULL DEFAULT '',
	`again_from` datetime(3),
	`revision` int NOT NULL DEFAULT 1,
	CONSTRAINT `alert_watch_pk` PRIMARY KEY(`rule_id`,`subject`)
);
--> statement-breakpoint
CREATE TABLE `digest_run` (
	`id` bigint unsigned AUTO_INCREMENT NOT NULL,
	`day` varchar(10) NOT NULL,
	`kind` varchar(20) NOT NULL,
	`made_at` datetime(3) NOT NULL,
	`sent` int NOT NULL,
	`content` json NOT NULL,
	CONSTRAINT `digest_run_id` PRIMARY KEY(`id`),
	CONSTRAINT `digest_run_uq` UNIQUE(`day`,`kind`)
);
--> statement-breakpoint
CREATE TABLE `mail_attempt` (
	`id` bigint unsigned AUTO_INCREMENT NOT NULL,
	`outbox_id` bigint unsigned NOT NULL,
	`at` datetime(3) NOT NULL,
	`owner` varchar(64) NOT NULL,
	`accepted` boolean NOT NULL,
	`answer` varchar(500) NOT NULL,
	`took_ms` int NOT NULL,
	CONSTRAINT `mail_attempt_id` PRIMARY KEY(`id`)
);
--> statement-breakpoint
CREATE TABLE `mail_bounce` (
	`id` bigint unsigned AUTO_INCREMENT NOT NULL,
	`outbox_id` bigint unsigned,
	`person_id` bigint unsigned,
	`address` varchar(254) NOT NULL,
	`at` datetime(3) NOT NULL,
	`action` varchar(20) NOT NULL,
	`status` varchar(20) NOT NULL,
	`diagnostic` varchar(500) NOT NULL DEFAULT '',
	CONSTRAINT `mail_bounce_id` PRIMARY KEY(`id`)
);
--> statement-breakpoint
CREATE TABLE `mail_outbox` (
	`id` bigint unsigned AUTO_INCREMENT NOT NULL,
	`message_id` varchar(160) NOT NULL,
	`kind` varchar(12) NOT NULL,
	`priority` varchar(8) NOT NULL,
	`state` varchar(8) NOT NULL,
	`person_id` bigint unsigned,
	`address` varchar(254) NOT NULL,
	`alert_id` bigint unsigned,
	`thread_id` varchar(160) NOT NULL DEFAULT '',
	`group_key` varchar(80) NOT NULL DEFAULT '',
	`subject` varchar(300) NOT NULL,
	`text_body` text NOT NULL,
	`html_body` text NOT NULL,
	`headers` json NOT NULL,
	`created_at` datetime(3) NOT NULL,
	`send_at` datetime(3) NOT NULL,
	`attempts` int NOT NULL DEFAULT 0,
	`lease_owner` varchar(64),
	`lease_until` datetime(3),
	`sent_at` datetime(3),
	`last_answer` varchar(500) NOT NULL DEFAULT '',
	`folded_into` bigint unsigned,
	CONSTRAINT `mail_outbox_id` PRIMARY KEY(`id`),
	CONSTRAINT `mail_outbox_message_uq` UNIQUE(`message_id`)
);
--> statement-breakpoint
CREATE TABLE `mail_preference` (
	`person_id` bigint unsigned NOT NULL,
	`quiet_from` varchar(5) NOT NULL DEFAULT '',
	`quiet_until` varchar(5) NOT NULL DEFAULT '',
	`digest` boolean NOT NULL DEFAULT true,
	`low_to_digest` boolean NOT NULL DEFAULT true,
	`sound` boolean NOT NULL DEFAULT false,
	`updated_at` datetime(3) NOT NULL,
	CONSTRAINT `mail_preference_person_id` PRIMARY KEY(`person_id`)
);
--> statement-breakpoint
CREATE TABLE `on_call_duty` (
	`id` bigint unsigned AUTO_INCREMENT NOT NULL,
	`step` varchar(16) NOT NULL,
	`person_id` bigint unsigned NOT NULL,
	`from_at` datetime(3) NOT NULL,
	`until_at` datetime(3) NOT NULL,
	`set_by` bigint unsigned,
	`set_at` datetime(3) NOT NULL,
	`replaced_at` datetime(3),
	CONSTRAINT `on_call_duty_id` PRIMARY KEY(`id`)
);
--> statement-breakpoint
ALTER TABLE `alert` ADD CONSTRAINT `alert_rule_id_alert_rule_id_fk` FOREIGN KEY (`rule_id`) REFERENCES `alert_rule`(`id`) ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `alert` ADD CONSTRAINT `alert_segment_id_segment_id_fk` FOREIGN KEY (`segment_id`) REFERENCES `segment`(`id`) ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `alert` ADD CONSTRAINT `alert_position_id_position_id_fk` FOREIGN KEY (`position_id`) REFERENCES `position`(`id`) ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `alert` ADD CONSTRAINT `alert_source_id_source_id_fk` FOREIGN KEY (`source_id`) REFERENCES `source`(`id`) ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `alert` ADD CONSTRAINT `alert_permit_id_permit_id_fk` FOREIGN KEY (`permit_id`) REFERENCES `permit`(`id`) ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `alert` ADD CONSTRAINT `alert_safety_event_id_safety_event_id_fk` FOREIGN KEY (`safety_event_id`) REFERENCES `safety_event`(`id`) ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `alert` ADD CONSTRAINT `alert_owner_id_person_id_fk` FOREIGN KEY (`owner_id`) REFERENCES `person`(`id`) ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `alert` ADD CONSTRAINT `alert_offered_to_person_id_fk` FOREIGN KEY (`offered_to`) REFERENCES `person`(`id`) ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `alert_act` ADD CONSTRAINT `alert_act_alert_id_alert_id_fk` FOREIGN KEY (`alert_id`) REFERENCES `alert`(`id`) ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `alert_act` ADD CONSTRAINT `alert_act_person_id_person_id_fk` FOREIGN KEY (`person_id`) REFERENCES `person`(`id`) ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `alert_act` ADD CONSTRAINT `alert_act_signed_act_id_signed_act_id_fk` FOREIGN KEY (`signed_act_id`) REFERENCES `signed_act`(`id`) ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `alert_out_of_service` ADD CONSTRAINT `alert_out_of_service_rule_id_alert_rule_id_fk` FOREIGN KEY (`rule_id`) REFERENCES `alert_rule`(`id`) ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `alert_out_of_service` ADD CONSTRAINT `alert_out_of_service_set_by_person_id_fk` FOREIGN KEY (`set_by`) REFERENCES `person`(`id`) ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `alert_out_of_service` ADD CONSTRAINT `alert_out_of_service_ended_by_person_id_fk` FOREIGN KEY (`ended_by`) REFERENCES `person`(`id`) ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `alert_rule` ADD CONSTRAINT `alert_rule_created_by_person_id_fk` FOREIGN KEY (`created_by`) REFERENCES `person`(`id`) ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `alert_rule_version` ADD CONSTRAINT `alert_rule_version_rule_id_alert_rule_id_fk` FOREIGN KEY (`rule_id`) REFERENCES `alert_rule`(`id`) ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `alert_rule_version` ADD CONSTRAINT `alert_rule_version_made_by_person_id_fk` FOREIGN KEY (`made_by`) REFERENCES `person`(`id`) ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `alert_shelf` ADD CONSTRAINT `alert_shelf_alert_id_alert_id_fk` FOREIGN KEY (`alert_id`) REFERENCES `alert`(`id`) ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `alert_shelf` ADD CONSTRAINT `alert_shelf_shelved_by_person_id_fk` FOREIGN KEY (`shelved_by`) REFERENCES `person`(`id`) ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `alert_shelf` ADD CONSTRAINT `alert_shelf_ended_by_person_id_fk` FOREIGN KEY (`ended_by`) REFERENCES `person`(`id`) ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `alert_watch` ADD CONSTRAINT `alert_watch_rule_id_alert_rule_id_fk` FOREIGN KEY (`rule_id`) REFERENCES `alert_rule`(`id`) ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `mail_attempt` ADD CONSTRAINT `mail_attempt_outbox_id_mail_outbox_id_fk` FOREIGN KEY (`outbox_id`) REFERENCES `mail_outbox`(`id`) ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `mail_bounce` ADD CONSTRAINT `mail_bounce_outbox_id_mail_outbox_id_fk` FOREIGN KEY (`outbox_id`) REFERENCES `mail_outbox`(`id`) ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `mail_bounce` ADD CONSTRAINT `mail_bounce_person_id_person_id_fk` FOREIGN KEY (`person_id`) REFERENCES `person`(`id`) ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `mail_outbox` ADD CONSTRAINT `mail_outbox_person_id_person_id_fk` FOREIGN KEY (`person_id`) REFERENCES `person`(`id`) ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `mail_outbox` ADD CONSTRAINT `mail_outbox_alert_id_alert_id_fk` FOREIGN KEY (`alert_id`) REFERENCES `alert`(`id`) ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `mail_preference` ADD CONSTRAINT `mail_preference_person_id_person_id_fk` FOREIGN KEY (`person_id`) REFERENCES `person`(`id`) ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `on_call_duty` ADD CONSTRAINT `on_call_duty_person_id_person_id_fk` FOREIGN KEY (`person_id`) REFERENCES `person`(`id`) ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `on_call_duty` ADD CONSTRAINT `on_call_duty_set_by_person_id_fk` FOREIGN KEY (`set_by`) REFERENCES `person`(`id`) ON DELETE no action ON UPDATE no action;--> statement-breakpoint
CREATE INDEX `alert_state_ix` ON `alert` (`state`,`priority`,`started_at`);--> statement-breakpoint
CREATE INDEX `alert_segment_ix` ON `alert` (`segment_id`,`started_at`);--> statement-breakpoint
CREATE INDEX `alert_noticed_ix` ON `alert` (`noticed_at`);--> statement-breakpoint
CREATE INDEX `alert_escalation_ix` ON `alert` (`next_escalation_at`);--> statement-breakpoint
CREATE INDEX `alert_act_ix` ON `alert_act` (`alert_id`,`id`);--> statement-breakpoint
CREATE INDEX `alert_out_of_service_ix` ON `alert_out_of_service` (`rule_id`,`ended_at`);--> statement-breakpoint
CREATE INDEX `alert_shelf_ix` ON `alert_shelf` (`alert_id`,`until_at`);--> statement-breakpoint
CREATE INDEX `mail_attempt_ix` ON `mail_attempt` (`outbox_id`,`id`);--> statement-breakpoint
CREATE INDEX `mail_bounce_address_ix` ON `mail_bounce` (`address`,`at`);--> statement-breakpoint
CREATE INDEX `mail_outbox_due_ix` ON `mail_outbox` (`state`,`send_at`,`id`);--> statement-breakpoint
CREATE INDEX `mail_outbox_lease_ix` ON `mail_outbox` (`state`,`lease_until`);--> statement-breakpoint
CREATE INDEX `mail_outbox_group_ix` ON `mail_outbox` (`group_key`,`state`);--> statement-breakpoint
CREATE INDEX `mail_outbox_person_ix` ON `mail_outbox` (`person_id`,`created_at`);--> statement-breakpoint
CREATE INDEX `mail_outbox_alert_ix` ON `mail_outbox` (`alert_id`);--> statement-breakpoint
CREATE INDEX `on_call_duty_ix` ON `on_call_duty` (`step`,`from_at`);