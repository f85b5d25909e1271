package main

import (
	"fmt"
	"net"
	"net/netip"
	"strings"

	"github.com/labstack/echo/v4"
)

// usualProxies are trusted with -behind-proxy unless told otherwise: this
// machine and private networks (RFC 1918, RFC 4193, and link-local), where a
// proxy in front of one program stands.
const usualProxies = "127.0.0.0/8,::1/128,10.0.0.0/8,172.16.0.0/12,192.168.0.0/16,169.254.0.0/16,fc00::/7,fe80::/10"

// parseProxies reads addresses and networks between commas.
func parseProxies(text string) ([]netip.Prefix, error) {
	var out []netip.Prefix
	for part := range strings.SplitSeq(text, ",") {
		if part = strings.TrimSpace(part); part == "" {
			continue
		}
		p, err := netip.ParsePrefix(part)
		if err != nil {
			a, err := netip.ParseAddr(part)
			if err != nil {
				return nil, fmt.Errorf("%q is neither an address nor a network such as 10.0.0.0/8", part)
			}
			p = netip.PrefixFrom(a, a.BitLen())
		}
		out = append(out, p.Masked())
	}
	if len(out) == 0 {
		return nil, fmt.Errorf("no address or network in %q", text)
	}
	return out, nil
}

// askerHost is the address that throttles count by: the peer's, or, when the
// peer is a trusted proxy, the last in X-Forwarded-For, and in a chain of proxies
// the nearest that is none of them. What stands further left the client may
// have made up. A network of one customer (RFC 6177) counts as one asker in
// IPv6.
func (a *App) askerHost(c echo.Context) string {
	peer := remoteHost(c)
	addr, err := netip.ParseAddr(peer)
	if err != nil {
		return peer
	}
	if a.trusts(addr) {
		var chain []string
		for _, line := range c.Request().Header.Values("X-Forwarded-For") {
			chain = append(chain, strings.Split(line, ",")...)
		}
		for i := len(chain) - 1; i >= 0; i-- {
			next, err := netip.ParseAddr(strings.TrimSpace(chain[i]))
			if err != nil {
				break // not written by a proxy that does its work
			}
			if addr = next; !a.proxyChain || !a.trusts(addr) {
				break
			}
		}
	}
	addr = addr.Unmap().WithZone("")
	if addr.Is6() {
		if p, err := addr.Prefix(64); err == nil {
			return p.String()
		}
	}
	return addr.String()
}

func (a *App) trusts(addr netip.Addr) bool {
	addr = addr.Unmap().WithZone("")
	for _, p := range a.proxies {
		if p.Contains(addr) {
			return true
		}
	}
	return false
}

// remoteHost is the peer's address without its port.
func remoteHost(c echo.Context) string {
	host, _, err := net.SplitHostPort(c.Request().RemoteAddr)
	if err != nil {
		return c.Request().RemoteAddr
	}
	return host
}
