;;; emacs.el --- Drives the language server from Emacs without a screen  -*- lexical-binding: t; -*-

;;; Commentary:

;;   emacs --batch -l emacs.el
;;
;; in a folder that holds a copy of `shell.tex'.  The environment and the last line are those of `neovim.lua'.
;;
;; In a batch Eglot would wait for a hook that never runs, so that the connection is made by hand, and what arrives from
;; the server is let in while waiting.  Never with -Q, by which Eglot is not found.  Tried with Emacs 28.2 and its Eglot
;; 1.9, which counts columns in UTF-16 and is sent findings; the names with two dashes are that version's own.

;;; Code:

(require 'eglot)
(require 'flymake)

(defvar patience (string-to-number (getenv "INDEXWISE_WAIT")))

(defvar told nil "The findings that were sent last.")

(cl-defmethod eglot-handle-notification :after
  (_server (_method (eql textDocument/publishDiagnostics)) &key diagnostics &allow-other-keys)
  "Keep DIAGNOSTICS."
  (setq told diagnostics))

(defun await (what holds)
  "Let in what the server sends until HOLDS does; complain with WHAT if it never does."
  (let ((end (+ (float-time) patience)))
    (while (not (funcall holds))
      (when (> (float-time) end)
        (error "%s within %s seconds" what patience))
      (accept-process-output nil 0.02))))

(defun must (holds what &rest arguments)
  "Complain with WHAT, filled with ARGUMENTS, unless HOLDS."
  (unless holds (apply #'error what arguments)))

(defun put-cursor (piece beyond)
  "Go BEYOND characters into the first PIECE of the document."
  (goto-char (point-min))
  (search-forward piece)
  (goto-char (+ (match-beginning 0) beyond)))

(defun start ()
  "Connect the document to the server."
  (setq-default eglot-sync-connect patience
                eglot-connect-timeout patience
                eglot-confirm-server-initiated-edits nil
                jsonrpc-default-request-timeout patience
                eglot-server-programs (list (cons 'latex-mode (split-string (getenv "INDEXWISE_SERVER") "\t"))))
  (find-file "shell.tex")
  (latex-mode)
  (apply #'eglot--connect (eglot--guess-contact))
  (must (eglot-current-server) "no server has started")
  (must (equal (plist-get (eglot--capabilities (eglot-current-server)) :positionEncoding) "utf-16")
        "columns are counted otherwise by the server"))

(defun is-told-of-the-slip ()
  "The slip is underlined, and nothing else."
  (await "there is no finding" #'flymake-diagnostics)
  (must (null (cdr (flymake-diagnostics))) "more than one finding")
  (let ((found (car (flymake-diagnostics))))
    (put-cursor "k $, which" 0)
    (must (string-search "free-index-mismatch" (flymake-diagnostic-text found))
          "the finding is: %s" (flymake-diagnostic-text found))
    (must (eq (flymake-diagnostic-type found) 'eglot-error) "the finding is no error")
    ;; A character of two units of UTF-16 stands before it.
    (must (and (= (flymake-diagnostic-beg found) (point))
               (= (flymake-diagnostic-end found) (1+ (point))))
          "the finding is at %s to %s, not at %s"
          (flymake-diagnostic-beg found) (flymake-diagnostic-end found) (point))))

(defun hovers ()
  "Hovering over a summed index tells of the sum."
  (put-cursor "S_{ij}" 4)
  (let* ((hover (jsonrpc-request (eglot-current-server) :textDocument/hover
                                 (eglot--TextDocumentPositionParams)))
         (contents (plist-get hover :contents))
         (text (plist-get contents :value)))
    (must text "nothing is told when hovering")
    (must (string-search (getenv "INDEXWISE_HOVER") text)
          "hovering tells of no sum written out: %s" text)))

(defun text-is (name what)
  "The document is the file NAME; complain with WHAT otherwise."
  (let ((wanted (with-temp-buffer (insert-file-contents name) (buffer-string))))
    (must (equal (buffer-string) wanted) "%s: %s" what (buffer-string))))

(defun fixes ()
  "Take the offer that puts the letter right, from what Emacs would show to choose from."
  (put-cursor "k $, which" 0)
  (let ((last-nonmenu-event ?x))
    (cl-letf (((symbol-function 'completing-read)
               (lambda (_prompt items &rest _)
                 (let ((title (seq-find (lambda (title) (string-search (getenv "INDEXWISE_FIX") title))
                                        (mapcar (lambda (item) (if (consp item) (car item) item)) items))))
                   (or title (error "nothing of what is offered mends it: %S" items))))))
      (condition-case trouble (eglot-code-actions (point) (1+ (point)) nil t)
        (error (error "nothing is mended: %s" (error-message-string trouble)))))))

(defun test ()
  "All that is asked of the server."
  (start)
  (is-told-of-the-slip)
  (hovers)
  (put-cursor "v_j" 2)
  (eglot-rename "m")
  (must (buffer-modified-p) "nothing is renamed")
  (text-is "renamed.tex" "the rename makes")
  (fixes)
  (text-is "mended.tex" "the fix makes")
  (eglot--signal-textDocument/didChange)
  ;; The mark itself goes with the text that is replaced, so that what the server says is looked at, too.
  (await "the finding is still there" (lambda () (and (seq-empty-p told) (null (flymake-diagnostics))))))

(let ((problem (condition-case trouble (progn (test) nil)
                 (error (error-message-string trouble)))))
  ;; Or Emacs would end while the server talks to it, and with a status of its own.
  (ignore-errors (eglot-shutdown (eglot-current-server)))
  (princ (if problem (format "wrong: %s\n" problem) "all as it should be\n"))
  (kill-emacs (if problem 1 0)))

;;; emacs.el ends here
