CREATE TRIGGER `log_entry_no_update` BEFORE UPDATE ON `log_entry` FOR EACH ROW SIGNAL SQLSTATE '45000' SET MESSAGE_TEXT = 'Log entries are amended and never edited';
