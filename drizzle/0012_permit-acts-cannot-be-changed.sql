CREATE TRIGGER `permit_act_no_update` BEFORE UPDATE ON `permit_act` FOR EACH ROW SIGNAL SQLSTATE '45000' SET MESSAGE_TEXT = 'What was done to a permit is append-only';
