// Runs before the first paint, so that a chosen theme does not flash in.
try {
	const theme = localStorage.getItem('elbowroom-theme');
	if (theme === 'day' || theme === 'night') document.documentElement.dataset.theme = theme;
} catch {
	// Storage may be blocked; the system's preference then decides.
}
