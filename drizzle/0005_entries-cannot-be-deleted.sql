CREATE TRIGGER `log_entry_no_delete` BEFORE DELETE ON `log_entry` FOR EACH ROW SIGNAL SQLSTATE '45000' SET MESSAGE_TEXT = 'Log entries are never deleted';
