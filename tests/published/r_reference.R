# Part of the script that computed r_reference.json (R 4.2.2, lmtest 0.9.40, sandwich 3.0.2).
# It was cut from a longer one: what concerns other procedures and data sets is left out, as
# are the lines that write the file.  It is kept to show how each number was made.
# Data: data/*.csv, first column "date" (first day of the period).
suppressPackageStartupMessages({library(lmtest); library(sandwich)})
options(digits = 17, warn = 1)
D <- "data"
rd <- function(name) { d <- read.csv(file.path(D, paste0(name, ".csv")), colClasses = c(date = "character"), check.names = FALSE); d }

## ---------------------------------------------------------------- cases
dlog <- function(x) c(NA, diff(log(x))); dif <- function(x) c(NA, diff(x))
mk <- function(file, expr, from = NULL, to = NULL) list(file = file, expr = expr, from = from, to = to)
CASES <- list(
 macro_gdp_cons   = list(src = "statsmodels macrodata", file = "macrodata", x = c(gdp = "dlog(realgdp)", cons = "dlog(realcons)"), cause = "cons", effect = "gdp", z = character(0), nwL = 4),
 macro_gdp_cons_inv = list(src = "statsmodels macrodata", file = "macrodata", x = c(gdp = "dlog(realgdp)", cons = "dlog(realcons)", inv = "dlog(realinv)"), cause = "cons", effect = "gdp", z = "inv", nwL = 4),
 macro_inv_gdp_cons = list(src = "statsmodels macrodata", file = "macrodata", x = c(gdp = "dlog(realgdp)", cons = "dlog(realcons)", inv = "dlog(realinv)"), cause = "inv", effect = "gdp", z = "cons", nwL = 4),
 macro_unemp_infl_tbill = list(src = "statsmodels macrodata", file = "macrodata", x = c(infl = "infl", unemp = "unemp", tbill = "tbilrate"), cause = "unemp", effect = "infl", z = "tbill", nwL = 4, from = "1959-04-01"),
 macro_tbill_unemp_infl = list(src = "statsmodels macrodata", file = "macrodata", x = c(infl = "infl", unemp = "unemp", tbill = "tbilrate"), cause = "tbill", effect = "unemp", z = "infl", nwL = 4, from = "1959-04-01"),
 e1_inc_cons_inv  = list(src = "Luetkepohl e1 (statsmodels)", file = "luetkepohl_e1", x = c(inv = "dlog(invest)", inc = "dlog(income)", cons = "dlog(cons)"), cause = "inc", effect = "cons", z = "inv", nwL = 4, to = "1978-10-01"),
 e1_inc_inv_cons  = list(src = "Luetkepohl e1 (statsmodels)", file = "luetkepohl_e1", x = c(inv = "dlog(invest)", inc = "dlog(income)", cons = "dlog(cons)"), cause = "inc", effect = "inv", z = "cons", nwL = 4, to = "1978-10-01"),
 e6_dp_r          = list(src = "Luetkepohl e6 = statsmodels interest_inflation", file = "luetkepohl_e6", x = c(Dp = "Dp", R = "R"), cause = "R", effect = "Dp", z = character(0), nwL = 4),
 denmark_lrm_lry  = list(src = "urca::denmark", file = "denmark", x = c(LRM = "LRM", LRY = "LRY", IBO = "IBO", IDE = "IDE"), cause = "LRM", effect = "LRY", z = c("IBO", "IDE"), nwL = 3),
 e4_inc_cons_seas = list(src = "Luetkepohl e4 (statsmodels), unadjusted", file = "luetkepohl_e4", x = c(inc = "dlog(inc)", cons = "dlog(cons)"), cause = "inc", effect = "cons", z = character(0), nwL = 4, seasonal = 4)
)
getcase <- function(cs) { d <- rd(cs$file); X <- sapply(cs$x, function(e) eval(parse(text = e), d)); X <- as.matrix(X); colnames(X) <- names(cs$x)
  ok <- rep(TRUE, nrow(d)); if (!is.null(cs$from)) ok <- ok & d$date >= cs$from; if (!is.null(cs$to)) ok <- ok & d$date <= cs$to
  ok <- ok & complete.cases(X); stopifnot(all(diff(which(ok)) == 1)); list(X = X[ok, , drop = FALSE], date = d$date[ok], idx = which(ok)) }

## ---------------------------------------------------------------- single-equation design
# rows t = first..N of X; columns lag 1..p of every variable in X; deterministic columns
lagm <- function(X, p, first = p + 1) { N <- nrow(X); if (p == 0) return(NULL); M <- NULL; for (v in colnames(X)) for (j in 1:p) { M <- cbind(M, X[(first - j):(N - j), v]); colnames(M)[ncol(M)] <- paste0(v, "_l", j) }; M }
detm <- function(det, N, first, seasonal = NULL, season_of = NULL) { n <- N - first + 1; tt <- first:N
  M <- switch(det, n = NULL, c = cbind(const = rep(1, n)), ct = cbind(const = rep(1, n), trend = tt), cs = cbind(const = rep(1, n)), cts = cbind(const = rep(1, n), trend = tt), ns = NULL)
  if (det %in% c("cs", "cts", "ns")) { s <- season_of[first:N]; S <- sapply(1:3, function(k) (s == k) - 1/4); colnames(S) <- paste0("sd", 1:3); M <- cbind(M, S) }; M }
fitols <- function(y, M) { d <- data.frame(y = y, M, check.names = FALSE); lm(y ~ . - 1, data = d) }
pick <- function(nm, v, lags) as.vector(outer(v, lags, function(a, b) paste0(a, "_l", b)))
gtest <- function(X, effect, cause, p, det, first = p + 1, extra = 0, season_of = NULL, robust = TRUE, Lfix = 4, check = TRUE) {
  N <- nrow(X); y <- X[first:N, effect]; L <- lagm(X, p + extra, first); Dm <- detm(det, N, first, season_of = season_of)
  M <- cbind(L, Dm); restr <- pick(NULL, cause, 1:p); q <- length(restr)
  if (length(y) - ncol(M) < 2) return(NULL)
  u <- fitols(y, M); Mr <- M[, setdiff(colnames(M), restr), drop = FALSE]
  if (ncol(Mr) == 0) return(NULL)
  r <- fitols(y, Mr); T <- length(y); k <- ncol(M); df <- T - k
  su <- sum(resid(u)^2); sr <- sum(resid(r)^2)
  F <- ((sr - su) / q) / (su / df)
  o <- list(lag = p, det = det, first_row = first, nobs = T, k = k, q = q, df_resid = df, ssr_u = su, ssr_r = sr,
    F = F, p_F = pf(F, q, df, lower.tail = FALSE),
    chi2_wald_dfadj = q * F, p_chi2_wald_dfadj = pchisq(q * F, q, lower.tail = FALSE),
    chi2_wald_ml = T * (sr - su) / su, p_chi2_wald_ml = pchisq(T * (sr - su) / su, q, lower.tail = FALSE),
    lr = T * log(sr / su), p_lr = pchisq(T * log(sr / su), q, lower.tail = FALSE),
    lm = T * (sr - su) / sr, p_lm = pchisq(T * (sr - su) / sr, q, lower.tail = FALSE),
    sum_coef_cause = NA)
  cf <- coef(u); names(cf) <- gsub("`", "", names(cf)); o$sum_coef_cause <- sum(cf[restr])
  if (check) { w <- waldtest(r, u); stopifnot(abs(w$F[2] - F) < 1e-7 * max(1, F)) }
  if (robust) { W <- function(V, nm) { dimnames(V) <- list(gsub("`", "", rownames(V)), gsub("`", "", colnames(V))); b <- cf[restr]; w <- drop(t(b) %*% solve(V[restr, restr]) %*% b)
      list(chi2 = w, p_chi2 = pchisq(w, q, lower.tail = FALSE), F = w / q, p_F = pf(w / q, q, df, lower.tail = FALSE)) }
    Lnw <- floor(4 * (T / 100)^(2/9))
    o$robust <- list(HC0 = W(vcovHC(u, type = "HC0")), HC1 = W(vcovHC(u, type = "HC1")), HC2 = W(vcovHC(u, type = "HC2")), HC3 = W(vcovHC(u, type = "HC3")))
    for (LL in unique(c(Lfix, Lnw))) { 
      o$robust[[paste0("NW_L", LL, "_noadj")]] <- W(NeweyWest(u, lag = LL, prewhite = FALSE, adjust = FALSE))
      o$robust[[paste0("NW_L", LL, "_adj")]]   <- W(NeweyWest(u, lag = LL, prewhite = FALSE, adjust = TRUE)) }
    o$nw_L_rule_4T100_2_9 <- Lnw
    if (check) { w <- waldtest(r, u, vcov = function(x) vcovHC(x, type = "HC1"), test = "Chisq"); stopifnot(abs(w$Chisq[2] - o$robust$HC1$chi2) < 1e-6 * max(1, w$Chisq[2])) } }
  o }

## ---------------------------------------------------------------- VAR in base R
varfit <- function(X, p, det, first = p + 1, season_of = NULL) { N <- nrow(X); Y <- X[first:N, , drop = FALSE]
  Z <- NULL; if (p > 0) for (j in 1:p) { B <- X[(first - j):(N - j), , drop = FALSE]; colnames(B) <- paste0(colnames(X), "_l", j); Z <- cbind(Z, B) }
  Dm <- detm(det, N, first, season_of = season_of); Z <- cbind(Dm, Z); T <- nrow(Y); K <- ncol(X)
  if (is.null(Z)) { E <- Y; B <- NULL; k <- 0 } else { q <- qr(Z); B <- qr.coef(q, Y); E <- Y - Z %*% B; k <- ncol(Z) }
  list(B = B, E = E, Z = Z, T = T, K = K, k = k, Sml = crossprod(E) / T, Sdf = crossprod(E) / (T - k)) }
ics <- function(X, pmax, det, season_of = NULL, common = TRUE) { p0 <- if (det == "n") 1 else 0; K <- ncol(X)
  rows <- lapply(p0:pmax, function(m) { v <- varfit(X, m, det, first = (if (common) pmax else m) + 1, season_of); ld <- as.numeric(determinant(v$Sml)$modulus); T <- v$T; nd <- v$k - K * m
    f1 <- m * K^2; f2 <- m * K^2 + K * nd
    list(lag = m, nobs = T, logdet_ml = ld, aic_luetkepohl = ld + 2 * f1 / T, bic_luetkepohl = ld + log(T) * f1 / T, hq_luetkepohl = ld + 2 * log(log(T)) * f1 / T,
      aic_withdet = ld + 2 * f2 / T, bic_withdet = ld + log(T) * f2 / T, hq_withdet = ld + 2 * log(log(T)) * f2 / T, fpe = ((T + v$k) / (T - v$k))^K * exp(ld),
      loglik = -T * K / 2 * (1 + log(2 * pi)) - T / 2 * ld) })
  g <- function(n) sapply(rows, `[[`, n); lg <- g("lag")
  list(det = det, pmax = pmax, sample = if (common) "common" else "own", table = rows, chosen = list(aic = lg[which.min(g("aic_withdet"))], bic = lg[which.min(g("bic_withdet"))], hq = lg[which.min(g("hq_withdet"))], fpe = lg[which.min(g("fpe"))])) }
season_vec <- function(dates) (as.integer(substr(dates, 6, 7)) - 1) %/% 3 + 1
out <- list(cases = list())

for (nm in names(CASES)) { cs <- CASES[[nm]]; g <- getcase(cs); X <- g$X; N <- nrow(X); K <- ncol(X); so <- season_vec(g$date); seas <- !is.null(cs$seasonal)
  dets <- if (seas) c("n", "c", "ct", "cs", "cts") else c("n", "c", "ct"); pmax <- 8
  rec <- list(source = cs$src, file = paste0("data/", cs$file, ".csv"), transforms = as.list(cs$x), from = cs$from, to = cs$to, start = g$date[1], end = g$date[N], n = N, cause = cs$cause, effect = cs$effect, conditioning = as.list(cs$z))
  for (dir in c("cause_to_effect", "effect_to_cause")) { ca <- if (dir == "cause_to_effect") cs$cause else cs$effect; ef <- if (dir == "cause_to_effect") cs$effect else cs$cause
    own <- list(); com <- list(); ty <- list()
    for (det in dets) for (p in 1:pmax) {
      a <- gtest(X, ef, ca, p, det, season_of = so, robust = TRUE, Lfix = cs$nwL); if (!is.null(a)) own[[length(own) + 1]] <- a
      b <- gtest(X, ef, ca, p, det, first = pmax + 1, season_of = so, robust = FALSE, check = FALSE); if (!is.null(b)) com[[length(com) + 1]] <- b
      for (dd in 1:2) if (det != "n") { tt <- try(gtest(X, ef, ca, p, det, first = p + dd + 1, extra = dd, season_of = so, robust = (dd == 1 && det == "c"), Lfix = cs$nwL, check = FALSE), silent = TRUE); if (!inherits(tt, "try-error") && !is.null(tt)) { tt$d <- dd; ty[[length(ty) + 1]] <- tt } } }
    rec[[dir]] <- list(cause = ca, effect = ef, own_sample = own, common_sample = com, toda_yamamoto = ty) }
  pm <- if (nm == "denmark_lrm_lry") 4 else 8
  rec$ic_var_common <- lapply(dets, function(d) ics(X, pm, d, so, TRUE)); rec$ic_var_own <- lapply(dets, function(d) { i <- ics(X, pm, d, so, FALSE); i })
  # single-equation (effect equation) criteria on the common sample
  rec$ic_single_eq <- lapply(dets, function(det) { tb <- lapply(1:pm, function(p) { z <- gtest(X, cs$effect, cs$cause, p, det, first = pm + 1, season_of = so, robust = FALSE, check = FALSE); if (is.null(z)) return(NULL); T <- z$nobs; ld <- log(z$ssr_u / T); list(lag = p, nobs = T, k = z$k, aic = ld + 2 * z$k / T, bic = ld + log(T) * z$k / T, hq = ld + 2 * log(log(T)) * z$k / T) }); tb <- Filter(Negate(is.null), tb); list(det = det, table = tb, chosen = list(aic = tb[[which.min(sapply(tb, `[[`, "aic"))]]$lag, bic = tb[[which.min(sapply(tb, `[[`, "bic"))]]$lag, hq = tb[[which.min(sapply(tb, `[[`, "hq"))]]$lag)) })
  out$cases[[nm]] <- rec; cat(nm, N, K, "\n") }

## ---------------------------------------------------------------- rolling / expanding windows
roll <- function(nm, W, p, det, dirs = c("cause_to_effect", "effect_to_cause")) { cs <- CASES[[nm]]; g <- getcase(cs); X <- g$X; N <- nrow(X); r <- list()
  for (dir in dirs) { ca <- if (dir == dirs[1]) cs$cause else cs$effect; ef <- if (dir == dirs[1]) cs$effect else cs$cause
    inner <- lapply(1:(N - W + 1), function(s) { z <- gtest(X[s:(s + W - 1), ], ef, ca, p, det, robust = FALSE, check = FALSE); list(start = g$date[s], end = g$date[s + W - 1], nobs = z$nobs, F = z$F, p_F = z$p_F) })
    outer <- lapply((p + 1):(N - W + 1), function(s) { z <- gtest(X[(s - p):(s + W - 1), ], ef, ca, p, det, robust = FALSE, check = FALSE); list(start = g$date[s], end = g$date[s + W - 1], nobs = z$nobs, F = z$F, p_F = z$p_F) })
    expd <- lapply(W:N, function(e) { z <- gtest(X[1:e, ], ef, ca, p, det, robust = FALSE, check = FALSE); list(start = g$date[1], end = g$date[e], nobs = z$nobs, F = z$F, p_F = z$p_F) })
    pv <- sapply(inner, `[[`, "p_F")
    r[[dir]] <- list(cause = ca, effect = ef, rolling_presample_inside_window = inner, rolling_presample_outside_window = outer, expanding_presample_inside = expd, n_windows = length(inner), share_p_below_05 = mean(pv < .05), min_p = min(pv), max_p = max(pv)) }
  list(case = nm, window = W, step = 1, lag = p, det = det, results = r) }
out$rolling <- list(macro_gdp_cons_p2 = roll("macro_gdp_cons", 60, 2, "c"), macro_unemp_infl_p2 = roll("macro_unemp_infl_tbill", 60, 2, "c"), macro_unemp_infl_p4_ct = roll("macro_unemp_infl_tbill", 60, 4, "ct"))

# Luetkepohl (2005), section 4.3: orders 0 to 4 of the e1 system
g1 <- getcase(CASES$e1_inc_cons_inv); out$luetkepohl_e1_criteria <- ics(g1$X, 4, "c")
