package main

// commands are all verbs of the program, in the order in which help lists
// them. A new one is a file of its own and a line here.
var commands = []command{
	// First what a visitor tries, then the work on files, then the database.
	demoCommand,
	serveCommand,
	planCommand,
	checkCommand,
	explainCommand,
	tryCommand,
	skyCommand,
	orbitCommand,
	schemaCommand,
	importCommand,
	exportCommand,
	userCommand,
	keyCommand,
	migrateCommand,
	healthCommand,
	versionCommand,
}
