CREATE TRIGGER `permit_version_no_update` BEFORE UPDATE ON `permit_version` FOR EACH ROW SIGNAL SQLSTATE '45000' SET MESSAGE_TEXT = 'What a permit said is never edited';
