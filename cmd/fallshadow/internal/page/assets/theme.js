// Sets the colours before anything is drawn: those chosen last, else the system's.
(function () {
  const chosen = localStorage.getItem("theme");
  const dark = matchMedia("(prefers-color-scheme: dark)").matches;
  document.documentElement.dataset.theme = chosen || (dark ? "dark" : "light");
})();
